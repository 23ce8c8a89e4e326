/**
 * The slowing-down indicators (V. Dakos et al. 2008, PNAS 105, 14308–14312: lag-1 autocorrelation in a moving window,
 * its trend by Kendall's τ) on two series of base R. No published τ could be confirmed, so the figures are recomputed
 * with base R 4.2.2 from its own data: in each window `cor(z[-1], z[-w])` (Pearson's correlation of the pairs of
 * neighbours within the window) and `sd(z)`, then `cor(., seq_len(n), method = "kendall")` over the windows.
 */
import { readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';
import { runningAutocorrelationInto, runningVarianceInto } from '../../server/signal/slidingIndicators.ts';
import { kendallTau } from './kendall.ts';

const { lh, lakeHuron } = JSON.parse(
  readFileSync(new URL('../data/r-lh-lakehuron.json', import.meta.url), 'utf8'),
) as Record<'lh' | 'lakeHuron', number[]>;

/** Both indicators of every full window, and the trend of each. */
function slowingDown(series: readonly number[], window: number) {
  const correlation = new Float64Array(series.length);
  const deviation = new Float64Array(series.length);
  runningAutocorrelationInto(Float64Array.from(series), window, correlation);
  runningVarianceInto(Float64Array.from(series), window, deviation);
  const full = { correlation: correlation.slice(window - 1), deviation: deviation.slice(window - 1) };
  full.deviation.forEach((variance, i) => {
    full.deviation[i] = Math.sqrt(variance);
  });
  const trendOf = (values: Float64Array) => kendallTau(values, [...values.keys()]);
  return { ...full, trend: [trendOf(full.correlation), trendOf(full.deviation)] };
}

describe('base R: luteinizing hormone, window 24', () => {
  const found = slowingDown(lh, 24);

  it('begins at 0.397057 and 0.448649, ends at 0.650861 and 0.620994', () => {
    expect(found.correlation).toHaveLength(25);
    expect(Math.abs(found.correlation[0]! - 0.397057)).toBeLessThanOrEqual(5e-7);
    expect(Math.abs(found.deviation[0]! - 0.448649)).toBeLessThanOrEqual(5e-7);
    expect(Math.abs(found.correlation[24]! - 0.650861)).toBeLessThanOrEqual(5e-7);
    expect(Math.abs(found.deviation[24]! - 0.620994)).toBeLessThanOrEqual(5e-7);
  });

  it('rises with τ = 0.626666666667 and 0.809369075130', () => {
    expect(Math.abs(found.trend[0]! - 0.626666666667)).toBeLessThan(1e-12);
    expect(Math.abs(found.trend[1]! - 0.80936907513)).toBeLessThan(1e-12);
  });

  it('has mean 2.4 and variance 0.304255319149 as a whole', () => {
    const variance = new Float64Array(lh.length);
    runningVarianceInto(Float64Array.from(lh), lh.length, variance);
    expect(lh.reduce((sum, one) => sum + one, 0) / lh.length).toBeCloseTo(2.4, 12);
    expect(Math.abs(variance[lh.length - 1]! - 0.304255319149)).toBeLessThan(1e-12);
  });
});

describe('base R: level of Lake Huron, window 49', () => {
  it('falls with τ = −0.735510204082 in correlation, rises with 0.719183673469 in deviation', () => {
    const { trend } = slowingDown(lakeHuron, 49);
    expect(Math.abs(trend[0]! + 0.735510204082)).toBeLessThan(1e-12);
    expect(Math.abs(trend[1]! - 0.719183673469)).toBeLessThan(1e-12);
  });

  it('has τ = −0.354366707503 against time itself, ties allowed for', () => {
    expect(Math.abs(kendallTau(lakeHuron, [...lakeHuron.keys()]) + 0.354366707503)).toBeLessThan(1e-12);
  });
});
