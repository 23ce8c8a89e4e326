/**
 * R. G. Newcombe (1998), "Two-sided confidence intervals for the single proportion: comparison of seven methods",
 * Statistics in Medicine 17, 857–872, Table I, 95 %. The column of the Wilson score method (method 3) was seen in
 * independent copies of the table; those of Wald (1), Wilson with continuity correction (4) and Clopper–Pearson (5) are
 * recomputed with numpy and with base R (`prop.test`, `binom.test`). Half a unit of the last digit. The rows with six
 * digits are recomputed with base R, 1e-6: 4 of 20 are the data of the NIST/SEMATECH e-Handbook, section
 * 7.2.4.2 (exact limits at 90 %); 28 of 51 the probability of detection of Finley (1884).
 */
import { describe, expect, it } from 'vitest';
import {
  type Confidence,
  clopperPearsonInterval,
  correctedWilsonInterval,
  waldInterval,
  wilsonInterval,
} from '../../server/rehearsal/intervals.ts';

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

describe('Newcombe 1998: the other intervals beside it', () => {
  it.each([
    [81, 263, [0.2522, 0.3638], [0.2535, 0.3682], [0.2527, 0.3676]],
    [15, 148, [0.0527, 0.15], [0.0598, 0.1644], [0.0578, 0.1617]],
    [0, 20, [0, 0], [0, 0.2005], [0, 0.1684]],
    [1, 29, [Number.NEGATIVE_INFINITY, 0.1009], [0.0018, 0.1963], [0.0009, 0.1776]],
  ])('read as in the table for %i of %i', (count, total, wald, corrected, exact) => {
    for (const [interval, [low, high]] of [
      [waldInterval(count, total), wald],
      [correctedWilsonInterval(count, total), corrected],
      [clopperPearsonInterval(count, total), exact],
    ] as const) {
      // printed as "<0"
      if (low === Number.NEGATIVE_INFINITY) expect(interval.low!).toBeLessThan(0);
      else expect(Math.abs(interval.low! - low!)).toBeLessThanOrEqual(5e-5);
      expect(Math.abs(interval.high! - high!)).toBeLessThanOrEqual(5e-5);
      expect(interval.value).toBe(count / total);
    }
  });

  it.each<[number, number, Confidence, number, number]>([
    [4, 20, 0.9, 0.071354, 0.401028],
    [4, 20, 0.95, 0.057334, 0.436614],
    [0, 10, 0.95, 0, 0.308497],
    [8, 10, 0.95, 0.443905, 0.974789],
  ])('exact limits for %i of %i at %d', (count, total, confidence, low, high) => {
    const interval = clopperPearsonInterval(count, total, confidence);
    expect(Math.abs(interval.low! - low)).toBeLessThan(1e-6);
    expect(Math.abs(interval.high! - high)).toBeLessThan(1e-6);
  });

  it('exact limits have closed forms where nothing or everything was counted', () => {
    expect(clopperPearsonInterval(0, 37).high).toBeCloseTo(1 - 0.025 ** (1 / 37), 13);
    expect(clopperPearsonInterval(37, 37).low).toBeCloseTo(0.025 ** (1 / 37), 13);
  });

  it('the corrected and the exact one contain the plain score interval, and all mirror', () => {
    for (let count = 0; count <= 30; count++) {
      const plain = wilsonInterval(count, 30);
      const corrected = correctedWilsonInterval(count, 30);
      expect(corrected.low!).toBeLessThanOrEqual(plain.low!);
      expect(corrected.high!).toBeGreaterThanOrEqual(plain.high!);
      for (const interval of [correctedWilsonInterval, clopperPearsonInterval, waldInterval]) {
        expect(interval(count, 30).low).toBeCloseTo(1 - interval(30 - count, 30).high!, 12);
      }
    }
  });

  it('say nothing where nothing was counted', () => {
    for (const interval of [correctedWilsonInterval, clopperPearsonInterval, waldInterval])
      expect(interval(0, 0)).toEqual({ value: null, low: null, high: null });
  });
});
