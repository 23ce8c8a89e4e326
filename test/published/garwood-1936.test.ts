/**
 * F. Garwood (1936), "Fiducial limits for the Poisson distribution", Biometrika 28, 437–442. The formula (half the
 * chi-square quantiles with 2x and 2x + 2 degrees of freedom) is his; the values below are recomputed with scipy and
 * with base R (`poisson.test`), to half a unit of the last digit. The last row is the example of the documentation of
 * `poisson.test`: 137 events over 24.19893.
 */
import { describe, expect, it } from 'vitest';
import { gammaQuantile, logGamma, lowerGamma } from '../../server/rehearsal/gamma.ts';
import { garwoodInterval } from '../../server/rehearsal/intervals.ts';

const TABLE: [number, [number, number], [number, number], [number, number]][] = [
  [0, [0, 2.9957], [0, 3.6889], [0, 5.2983]],
  [1, [0.0513, 4.7439], [0.0253, 5.5716], [0.005, 7.4301]],
  [2, [0.3554, 6.2958], [0.2422, 7.2247], [0.1035, 9.2738]],
  [3, [0.8177, 7.7537], [0.6187, 8.7673], [0.3379, 10.9775]],
  [4, [1.3663, 9.1535], [1.0899, 10.2416], [0.6722, 12.5941]],
  [5, [1.9701, 10.513], [1.6235, 11.6683], [1.0779, 14.1498]],
  [6, [2.613, 11.8424], [2.2019, 13.0595], [1.5369, 15.6597]],
  [7, [3.2853, 13.1481], [2.8144, 14.4227], [2.0373, 17.1336]],
  [8, [3.9808, 14.4346], [3.4538, 15.7632], [2.5711, 18.5782]],
  [9, [4.6952, 15.7052], [4.1154, 17.0848], [3.1324, 19.9984]],
  [10, [5.4254, 16.9622], [4.7954, 18.3904], [3.7169, 21.3978]],
  [13, [7.6896, 20.6686], [6.922, 22.2304], [5.5801, 25.4967]],
  [15, [9.2463, 23.0971], [8.3954, 24.7402], [6.8934, 28.1641]],
  [20, [13.2547, 29.062], [12.2165, 30.8884], [10.3533, 34.668]],
  [30, [21.594, 40.6905], [20.2409, 42.8269], [17.7672, 47.2093]],
  [50, [38.9647, 63.2871], [37.111, 65.9188], [33.6638, 71.2661]],
  [100, [84.1393, 118.0793], [81.364, 121.6268], [76.1205, 128.7606]],
];

describe('Garwood 1936: Poisson limits', () => {
  it.each(TABLE)('agree with the table for %i events at 90, 95 and 99 %%', (count, ...limits) => {
    ([0.9, 0.95, 0.99] as const).forEach((confidence, k) => {
      const interval = garwoodInterval(count, 1, confidence);
      expect(Math.abs(interval.low! - limits[k]![0])).toBeLessThanOrEqual(5.0001e-5);
      expect(Math.abs(interval.high! - limits[k]![1])).toBeLessThanOrEqual(5.0001e-5);
    });
  });

  it('give 4.753125 to 6.692709 for 137 events over 24.19893', () => {
    const interval = garwoodInterval(137, 24.19893);
    expect(Math.abs(interval.value! - 5.661407)).toBeLessThan(1e-6);
    expect(Math.abs(interval.low! - 4.753125)).toBeLessThan(1e-6);
    expect(Math.abs(interval.high! - 6.692709)).toBeLessThan(1e-6);
  });

  it('say nothing where no time passed', () => {
    expect(garwoodInterval(0, 0)).toEqual({ value: null, low: null, high: null });
  });
});

describe('the functions underneath', () => {
  it('give ln Γ at whole and half numbers', () => {
    let logFactorial = 0;
    for (let n = 1; n < 60; n++) {
      expect(Math.abs(logGamma(n) - logFactorial)).toBeLessThan(1e-13 * Math.max(1, logFactorial));
      logFactorial += Math.log(n);
    }
    expect(logGamma(0.5)).toBeCloseTo(Math.log(Math.sqrt(Math.PI)), 13);
  });

  it('give P(a, x) of whole a as one minus a sum of Poisson probabilities', () => {
    for (const a of [1, 2, 5, 20]) {
      for (const x of [0.1, 1, 4.9, 5.1, 19, 21, 40]) {
        let term = Math.exp(-x);
        let sum = 0;
        for (let k = 0; k < a; k++) {
          sum += term;
          term *= x / (k + 1);
        }
        expect(Math.abs(lowerGamma(a, x) - (1 - sum))).toBeLessThan(1e-14);
      }
    }
  });

  it('invert each other to twelve digits', () => {
    for (const a of [0.5, 1, 3, 17, 250]) {
      for (const share of [0.005, 0.025, 0.3, 0.5, 0.9, 0.975, 0.995]) {
        expect(Math.abs(lowerGamma(a, gammaQuantile(a, share)) - share)).toBeLessThan(1e-12);
      }
    }
    expect(gammaQuantile(1, 0.975)).toBeCloseTo(-Math.log(0.025), 12);
  });
});
