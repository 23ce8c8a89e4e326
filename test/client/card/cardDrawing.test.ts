import { describe, expect, it } from 'vitest';
import {
  cardSpan,
  nearestIndex,
  pathOf,
  place,
  rangeOf,
  secondsTicks,
  valueAt,
} from '../../../client/card/cardDrawing.ts';
import { card } from './fixtures.ts';

const x = { low: 0, high: 10, from: 0, to: 100 };
const y = { low: 0, high: 1, from: 50, to: 0 };
const line = (times: number[], values: number[]) =>
  pathOf(Float64Array.from(times), Float64Array.from(values), x, y);

describe('a scale', () => {
  it('lands its ends on its pixels and reads back what it placed', () => {
    expect([place(x, 0), place(x, 10)]).toEqual([0, 100]);
    for (const value of [0, 0.3, 1]) expect(valueAt(y, place(y, value))).toBeCloseTo(value, 12);
  });
});

describe('the line of a card', () => {
  it('joins samples and lifts the pen where one is missing', () => {
    expect(line([0, 5, 10], [0, 1, 0])).toBe('M0.0,50.0L50.0,0.0L100.0,50.0');
    expect(line([0, 5, 10], [0, Number.NaN, 1])).toBe('M0.0,50.0M100.0,0.0');
    expect(line([], [])).toBe('');
  });

  it('keeps first, least, greatest and last of many samples in one pixel column, in their order', () => {
    const times = [5, 5.0001, 5.0002, 5.0003, 5.0004, 5.0005];
    expect(line(times, [0.5, 1, 0.4, 0, 0.2, 0.6])).toBe('M50.0,25.0L50.0,0.0L50.0,50.0L50.0,20.0');
  });

  it('stays short however many samples there are', () => {
    const times = Array.from({ length: 100_000 }, (_, i) => i / 10_000);
    const path = line(
      times,
      times.map((time) => Math.abs(Math.sin(40 * time))),
    );
    expect(path.split(/[ML]/).length).toBeLessThan(4 * 102);
  });
});

describe('what a card shows', () => {
  it('reaches from what it holds to the switch and a little beyond, also before samples after it have come', () => {
    const made = card({ at: 100, horizon: 10, t: Float64Array.of(70, 85, 100) });
    expect(cardSpan(made)).toEqual([-30, 1]);
    expect(cardSpan({ ...made, t: new Float64Array() })).toEqual([-10.5, 1]);
  });

  it('finds a range around finite values and thresholds', () => {
    expect(rangeOf(Float64Array.of(Number.NaN, 0, 1), [2])).toEqual([-0.16, 2.16]);
    expect(rangeOf(Float64Array.of(Number.NaN))).toEqual([0, 1]);
    const [low, high] = rangeOf(Float64Array.of(3));
    expect(low).toBeLessThan(3);
    expect(high).toBeGreaterThan(3);
  });

  it('marks the switch itself on the time axis', () => {
    expect(secondsTicks(-30, 10, 500)).toEqual([-30, -20, -10, 0, 10]);
    expect(secondsTicks(-0.03, 0.01, 500)).toContain(0);
  });

  it('finds the nearest sample, and none where there is none', () => {
    const t = Float64Array.of(0, 1, 3);
    expect([-5, 0.4, 0.6, 2.1, 9].map((time) => nearestIndex(t, time))).toEqual([0, 0, 1, 2, 2]);
    expect(nearestIndex(new Float64Array(), 1)).toBe(-1);
  });
});
