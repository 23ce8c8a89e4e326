import { describe, expect, it } from 'vitest';
import { calmRange, tidyStep, timeStep, valueTicks } from '../../../client/strip/ticks.ts';

describe('ticks', () => {
  it('stand a tidy step apart, in no more pieces than asked', () => {
    for (const span of [0.003, 0.7, 1, 8, 42, 999, 1e6])
      for (const most of [2, 3, 5, 9]) {
        const step = tidyStep(span, most);
        expect(span / step).toBeLessThanOrEqual(most * (1 + 1e-9));
        expect([1, 2, 5]).toContain(Math.round(step / 10 ** Math.floor(Math.log10(step) + 1e-9)));
      }
  });

  it('stand at steps of time that people count in', () => {
    expect(timeStep(180, 6)).toBe(30);
    expect(timeStep(3600, 6)).toBe(600);
    expect(timeStep(2, 5)).toBe(0.5);
    expect(timeStep(10 * 86400, 5)).toBe(2 * 86400);
  });

  it('are at least three values within the range', () => {
    expect(valueTicks(-4.6, 4.2)).toEqual([-4, -2, 0, 2, 4]);
    for (const [low, high] of [
      [0, 1],
      [-0.3, 7.7],
      [41.2, 43.9],
      [-1e-3, 2e-3],
    ] as const) {
      const ticks = valueTicks(low, high);
      expect(ticks.length).toBeGreaterThanOrEqual(3);
      expect(ticks.every((tick) => tick >= low && tick <= high)).toBe(true);
    }
  });
});

describe('the range of values', () => {
  it('holds still while the values fit and fill it', () => {
    const kept: [number, number] = [-5, 5];
    expect(calmRange(kept, -4, 3)).toBe(kept);
    expect(calmRange(kept, null, null)).toBe(kept);
  });

  it('is drawn anew, with a margin, when values leave it or shrink', () => {
    const [low, high] = calmRange([-5, 5], -6, 3);
    expect(low).toBeLessThan(-6);
    expect(high).toBeGreaterThan(3);
    expect(calmRange([-5, 5], -0.5, 0.5)[1]).toBeLessThan(1);
  });

  it('has a height even for a constant', () => {
    for (const value of [0, 46.4, -3]) {
      const range = calmRange(null, value, value);
      expect(range[0]).toBeLessThan(value);
      expect(range[1]).toBeGreaterThan(value);
      expect(calmRange(range, value, value)).toBe(range);
    }
  });
});
