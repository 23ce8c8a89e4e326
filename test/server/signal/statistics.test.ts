import { describe, expect, it } from 'vitest';
import {
  addToMoments,
  createMoments,
  deviationOf,
  excessKurtosis,
  meanOf,
  median,
} from '../../../server/signal/statistics.ts';

describe('statistics', () => {
  it('knows no mean before the first value and no deviation before the second', () => {
    const moments = createMoments();
    expect(meanOf(moments)).toBeNaN();
    addToMoments(moments, 5);
    expect(meanOf(moments)).toBe(5);
    expect(deviationOf(moments)).toBeNaN();
    addToMoments(moments, 7);
    expect(deviationOf(moments)).toBeCloseTo(Math.SQRT2, 15);
  });

  it('takes the middle value, or the mean of the two, and leaves the data in order', () => {
    const values = Float64Array.of(3, 1, 2);
    expect(median(values)).toBe(2);
    expect([...values]).toEqual([3, 1, 2]);
    expect(median(Float64Array.of(4, 1, 3, 2))).toBe(2.5);
    expect(median(new Float64Array(0))).toBeNaN();
  });

  it('gives two equal spikes the kurtosis −2 and a rare one its own', () => {
    expect(excessKurtosis(Float64Array.of(-1, 1, -1, 1))).toBeCloseTo(-2, 14);
    // one value of n away from the rest: m₄/m₂² = (n² − 3n + 3)/(n − 1)
    const rare = new Float64Array(10);
    rare[4] = 7;
    expect(excessKurtosis(rare)).toBeCloseTo(73 / 9 - 3, 12);
  });
});
