/**
 * R. G. Newcombe (1998), "Two-sided confidence intervals for the single proportion: comparison of seven methods",
 * Statistics in Medicine 17, 857–872, Table I, Wilson score method (method 3), 95 %: seen in independent
 * copies of the table, half a unit of the last printed digit. The other rows are recomputed with base R (`prop.test`
 * without correction), 1e-6: 4 of 20 are the data of the NIST/SEMATECH e-Handbook, section 7.2.4.2; 28 of 51 the
 * probability of detection of Finley (1884).
 */
import { describe, expect, it } from 'vitest';
import { type Confidence, wilsonInterval } from '../../server/rehearsal/intervals.ts';

describe('Newcombe 1998: the Wilson score interval', () => {
  it.each([
    [81, 263, 0.2553, 0.3662],
    [15, 148, 0.0624, 0.1605],
    [0, 20, 0, 0.1611],
    [1, 29, 0.0061, 0.1718],
  ])('reads as printed for %i of %i', (count, total, low, high) => {
    const interval = wilsonInterval(count, total);
    expect(Math.abs(interval.low! - low)).toBeLessThanOrEqual(5e-5);
    expect(Math.abs(interval.high! - high)).toBeLessThanOrEqual(5e-5);
    expect(interval.value).toBe(count / total);
  });

  it.each<[number, number, Confidence, number, number]>([
    [4, 20, 0.9, 0.093118, 0.378377],
    [4, 20, 0.95, 0.080658, 0.416017],
    [0, 10, 0.95, 0, 0.277533],
    [8, 10, 0.95, 0.490162, 0.943318],
    [28, 51, 0.95, 0.413847, 0.677325],
  ])('agrees with the recomputed values for %i of %i at %d', (count, total, confidence, low, high) => {
    const interval = wilsonInterval(count, total, confidence);
    expect(Math.abs(interval.low! - low)).toBeLessThan(1e-6);
    expect(Math.abs(interval.high! - high)).toBeLessThan(1e-6);
  });

  it('mirrors successes and failures', () => {
    const some = wilsonInterval(3, 17);
    const others = wilsonInterval(14, 17);
    expect(some.low).toBeCloseTo(1 - others.high!, 14);
    expect(some.high).toBeCloseTo(1 - others.low!, 14);
    expect(wilsonInterval(17, 17).high).toBe(1);
  });

  it('says nothing where nothing was counted', () => {
    expect(wilsonInterval(0, 0)).toEqual({ value: null, low: null, high: null });
  });
});
