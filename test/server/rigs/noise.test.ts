import { describe, expect, it } from 'vitest';
import { redNoise, whiteNoise } from '../../../server/rigs/noise.ts';

const SAMPLES = 100_000;
const mean = (values: Float64Array) => values.reduce((sum, one) => sum + one, 0) / values.length;
const product = (values: Float64Array, lag: number) =>
  mean(values.subarray(lag).map((one, i) => one * values[i]!));

describe('noise', () => {
  it('is white: mean 0, variance 1, no memory', () => {
    const values = whiteNoise('white', SAMPLES);
    const error = 5 / Math.sqrt(SAMPLES);
    expect(Math.abs(mean(values))).toBeLessThan(error);
    expect(Math.abs(product(values, 0) - 1)).toBeLessThan(error * Math.SQRT2);
    for (const lag of [1, 2, 10]) expect(Math.abs(product(values, lag))).toBeLessThan(error);
  });

  it('is red: variance 1, and φ to the power of the lag is remembered', () => {
    const values = redNoise('red', SAMPLES, 0.9);
    // a sum of n values counts for n(1 − φ²)/(1 + φ²) independent products
    const error = 5 * Math.sqrt((2 * (1 + 0.81)) / ((1 - 0.81) * SAMPLES));
    for (const lag of [0, 1, 5, 20]) expect(Math.abs(product(values, lag) - 0.9 ** lag)).toBeLessThan(error);
  });

  it('is the same for the same seed and another for another', () => {
    expect(redNoise('a', 50, 0.5)).toEqual(redNoise('a', 50, 0.5));
    expect(redNoise('a', 50, 0.5)).not.toEqual(redNoise('b', 50, 0.5));
    expect(redNoise('a', 50, 0)).toEqual(whiteNoise('a', 50));
  });
});
