/**
 * A. H. Murphy (1973), "A new vector partition of the probability score", Journal of Applied Meteorology 12, 595–600:
 * Brier score = reliability − resolution + uncertainty, exact when each bin holds one forecast value.
 *
 * Worked table: chances of precipitation, D. S. Wilks (1995), Statistical Methods in the Atmospheric Sciences, Table
 * 7.3, p. 246, seen in a public help page that quotes it; that page has two misplaced decimals (0.245 and 0.203), which
 * must read 0.0245 and 0.0203 for the shares to sum to 1. Reliability 0.00083, resolution 0.06279, uncertainty 0.13542,
 * score 0.07346, skill 0.4575 are recomputed from these inputs of three digits; tolerance 5e-4.
 *
 * The set of sixteen is not published; its values are exact fractions.
 */
import { describe, expect, it } from 'vitest';
import { brierDecomposition, forecastBins } from '../../server/rehearsal/verification.ts';
import { createRandom } from '../../server/signal/random.ts';

const FORECAST = [0, 0.05, 0.1, 0.2, 0.3, 0.4, 0.5, 0.6, 0.7, 0.8, 0.9, 1];
const OBSERVED = [0.006, 0.019, 0.059, 0.15, 0.277, 0.377, 0.511, 0.587, 0.723, 0.779, 0.934, 0.933];
const SHARE = [0.4112, 0.0671, 0.1833, 0.0986, 0.0616, 0.0366, 0.0303, 0.0275, 0.0245, 0.022, 0.017, 0.0203];

describe('Murphy 1973: what the Brier score is made of', () => {
  it('agrees with the worked table of precipitation forecasts', () => {
    const bins = FORECAST.map((forecast, i) => ({ forecast, share: SHARE[i]!, observed: OBSERVED[i]! }));
    expect(SHARE.reduce((sum, one) => sum + one, 0)).toBeCloseTo(1, 12);
    const found = brierDecomposition(bins);
    expect(Math.abs(found.reliability - 0.00083)).toBeLessThan(5e-4);
    expect(Math.abs(found.resolution - 0.06279)).toBeLessThan(5e-4);
    expect(Math.abs(found.uncertainty - 0.13542)).toBeLessThan(5e-4);
    expect(Math.abs(found.score - 0.07346)).toBeLessThan(5e-4);
    expect(Math.abs(found.skill - 0.4575)).toBeLessThan(5e-4);
  });

  it('gives sixteen forecasts 0.17 = 0.00541667 − 0.08541667 + 0.25', () => {
    const forecasts = [0.1, 0.1, 0.1, 0.1, 0.1, 0.3, 0.3, 0.3, 0.5, 0.5, 0.7, 0.7, 0.7, 0.9, 0.9, 0.9];
    const happened = [0, 0, 0, 0, 1, 0, 0, 1, 0, 1, 1, 1, 0, 1, 1, 1];
    const found = brierDecomposition(forecastBins(forecasts, happened));
    expect(found.score).toBeCloseTo(0.17, 12);
    expect(Math.abs(found.reliability - 0.00541667)).toBeLessThanOrEqual(5e-9);
    expect(Math.abs(found.resolution - 0.08541667)).toBeLessThanOrEqual(5e-9);
    expect(found.uncertainty).toBeCloseTo(0.25, 12);
  });

  it('adds up, and the score is the mean squared error, whatever the forecasts', () => {
    const { uniform } = createRandom('forecasts');
    for (let set = 0; set < 20; set++) {
      const forecasts = Array.from({ length: 300 }, () => Math.round(10 * uniform()) / 10);
      const happened = forecasts.map((chance) => (uniform() < 0.2 + 0.5 * chance ? 1 : 0));
      const found = brierDecomposition(forecastBins(forecasts, happened));
      const direct = forecasts.reduce((sum, chance, i) => sum + (chance - happened[i]!) ** 2, 0) / 300;
      expect(found.score).toBeCloseTo(direct, 12);
      expect(found.reliability - found.resolution + found.uncertainty).toBeCloseTo(direct, 12);
      expect(found.skill).toBeCloseTo((found.resolution - found.reliability) / found.uncertainty, 12);
    }
  });
});
