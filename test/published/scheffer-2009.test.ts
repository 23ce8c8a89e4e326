/**
 * M. Scheffer et al. (2009), "Early-warning signals for critical transitions", Nature 461, 53–59: near a transition an
 * equilibrium recovers slowly, and x[n+1] = φ x[n] + σε with φ = exp(−kΔt) has the variance σ²/(1 − φ²): both rise as
 * the rate k of recovery falls. The table below is that formula, recomputed.
 *
 * Short windows lean low: the correlation of neighbours within a window of n comes out near φ − (1 + 3φ)/n (M. G.
 * Kendall 1954, Biometrika 41, 403), where the autocorrelation function divided by the variance of all comes out near
 * φ − (1 + 4φ)/n (F. H. C. Marriott, J. A. Pope 1954, Biometrika 41, 390). The running estimator here is the first.
 * Recomputed from 40 000 runs: φ = 0.5, n = 50: 0.4497 (first form) and 0.4400 (second); φ = 0.9, n = 200: 0.8808 and
 * 0.8758.
 */
import { describe, expect, it } from 'vitest';
import { redNoise } from '../../server/rigs/noise.ts';
import { runningAutocorrelationInto, runningVarianceInto } from '../../server/signal/slidingIndicators.ts';

const LONG = 200_000;

/** Last value of an indicator whose window is the whole series. */
function whole(indicator: typeof runningVarianceInto, values: Float64Array): number {
  const out = new Float64Array(values.length);
  indicator(values, values.length, out);
  return out[values.length - 1]!;
}

describe('Scheffer et al. 2009: slow recovery', () => {
  it.each([
    [1, 0.36788, 1.1565],
    [0.5, 0.60653, 1.582],
    [0.2, 0.81873, 3.0332],
    [0.1, 0.90484, 5.5167],
    [0.05, 0.95123, 10.5083],
  ])('shows at kΔt = %d as lag-1 autocorrelation %d and variance %d', (rate, phi, variance) => {
    const kept = Math.exp(-rate);
    expect(Math.abs(kept - phi)).toBeLessThanOrEqual(5e-6);
    expect(Math.abs(1 / (1 - kept * kept) - variance)).toBeLessThanOrEqual(5.0001e-5);
    const deviation = 1 / Math.sqrt(1 - kept * kept);
    const series = redNoise(`recovery ${rate}`, LONG, kept).map((x) => deviation * x);
    // standard errors: √((1 − φ²)/n), and for the variance its square times √(2(1 + φ²)/((1 − φ²)n))
    const forCorrelation = Math.sqrt((1 - kept * kept) / LONG);
    const forVariance = Math.sqrt((2 * (1 + kept * kept)) / ((1 - kept * kept) * LONG));
    expect(Math.abs(whole(runningAutocorrelationInto, series) - phi)).toBeLessThan(5 * forCorrelation);
    expect(Math.abs(whole(runningVarianceInto, series) / variance - 1)).toBeLessThan(5 * forVariance);
  });

  it.each([
    [0.5, 50, 0.4497, 0.44],
    [0.9, 200, 0.8808, 0.8758],
  ])('is seen too low in short windows: φ = %d over %d samples as %d, not %d', (phi, n, first, second) => {
    const runs = 8000;
    let sum = 0;
    let square = 0;
    for (let run = 0; run < runs; run++) {
      const one = whole(runningAutocorrelationInto, redNoise(`bias ${phi} ${run}`, n, phi));
      sum += one;
      square += one * one;
    }
    const mean = sum / runs;
    const error = Math.sqrt((square / runs - mean * mean) / runs);
    expect(Math.abs(mean - (phi - (1 + 3 * phi) / n))).toBeLessThan(Math.max(5 * error, 0.0015));
    expect(Math.abs(mean - first)).toBeLessThan(Math.abs(mean - second));
  });
});
