import { describe, expect, it } from 'vitest';
import { countInto, createHistogram } from '../../../client/rehearse/histogram.ts';
import {
  curveOf,
  nearestRow,
  nearestSwitch,
  outcomesOf,
  switchLanes,
  warningLanes,
} from '../../../client/rehearse/operating.ts';
import { SWITCH_OUTCOMES, WARNING_OUTCOMES } from '../../../shared-types/outcomes.ts';
import type { OperatingRow } from '../../../shared-types/rehearsal.ts';
import { score } from '../fixtures.ts';
import { operatingRow } from './fixtures.ts';

const codes = <O>(order: readonly O[], ...outcomes: O[]) =>
  Uint8Array.from(outcomes, (one) => order.indexOf(one));

const row: OperatingRow = operatingRow({
  recording: Uint16Array.of(0, 0, 1, 1),
  at: Float64Array.of(110, 150, 900, 950),
  outcome: codes(WARNING_OUTCOMES, 'true', 'false', 'true', 'late'),
  switches: codes(SWITCH_OUTCOMES, 'warned', 'missed', 'warned', 'late'),
});

describe('looking a threshold up in the operating table', () => {
  it('parts the warnings into lanes by what became of them, each at its place on the sheet', () => {
    const lanes = warningLanes(row, Float64Array.of(-100, -840), ['true', 'late', 'false', 'repeat']);
    expect(lanes.map(({ outcome, count }) => [outcome, count])).toEqual([
      ['true', 2],
      ['late', 1],
      ['false', 1],
      ['repeat', 0],
    ]);
    expect([...lanes[0]!.places]).toEqual([10, 60]);
    expect([...lanes[1]!.places]).toEqual([110]);
    expect([...lanes[2]!.places]).toEqual([50]);
  });

  it('leaves out outcomes that have no lane', () => {
    const lanes = warningLanes(row, Float64Array.of(0, 0), ['false']);
    expect(lanes).toHaveLength(1);
    expect([...lanes[0]!.places]).toEqual([150]);
  });

  it('parts the switches by what became of them under the threshold', () => {
    const lanes = switchLanes(row, Float64Array.of(1, 2, 3, 4), ['warned', 'late', 'missed']);
    expect(lanes.map(({ places }) => [...places])).toEqual([[1, 3], [4], [2]]);
  });

  it('keeps room for every outcome that some threshold has', () => {
    const other = operatingRow({ outcome: codes(WARNING_OUTCOMES, 'repeat') });
    expect(outcomesOf([row, other], ({ outcome }) => outcome, WARNING_OUTCOMES)).toEqual([
      'true',
      'repeat',
      'late',
      'false',
    ]);
  });

  it('makes a curve of what was counted', () => {
    const none = { value: null, low: null, high: null };
    const rows = [row, operatingRow({ score: score({ detection: none }) })];
    const curve = curveOf({ variable: 'forcing', rows });
    expect(curve[0]).toEqual({
      falsePerHour: row.score.falsePerHour.value,
      detection: row.score.detection.value,
    });
    expect(curve[1]).toBeNull();
  });

  it('finds the point under the hand, and stays with the row in hand where points coincide', () => {
    const x = Float64Array.of(300, 200, 100, 100, 100, NaN);
    const y = Float64Array.of(10, 12, 40, 40, 40, NaN);
    expect(nearestRow(x, y, 290, 15, 0)).toBe(0);
    expect(nearestRow(x, y, 101, 39, 4)).toBe(4);
    expect(nearestRow(x, y, 101, 39, 0)).toBe(2);
    expect(nearestRow(x, y, 101, 39, 3)).toBe(3);
    expect(nearestRow(Float64Array.of(NaN), Float64Array.of(NaN), 0, 0, 0)).toBe(-1);
  });

  it('finds the switch that was meant, and none where none is near', () => {
    const places = Float64Array.of(10, 20, 90);
    expect(nearestSwitch(places, 17, 5)).toBe(1);
    expect(nearestSwitch(places, 50, 5)).toBe(-1);
    expect(nearestSwitch(new Float64Array(), 50, 5)).toBe(-1);
  });
});

describe('the histogram of leads', () => {
  it('has the same bins for every threshold, from the least lead to the horizon', () => {
    const histogram = createHistogram(10, 20, 0);
    expect(histogram).toMatchObject({ start: 0, width: 1 });
    expect(histogram.start + histogram.width * histogram.counts.length).toBeGreaterThan(20);
    // what reaches a person 12 s late can have a negative lead
    expect(createHistogram(10, 20, 12).start).toBeLessThanOrEqual(-2);
  });

  it('counts a lead on the edge of a bin in the bin that begins there', () => {
    const histogram = createHistogram(0, 2, 0);
    expect(histogram.width).toBeCloseTo(0.1, 12);
    countInto(histogram, Float64Array.of(0, 0.1, 0.3, 0.30001, 0.7, 2));
    expect(histogram.counts[0]).toBe(1);
    expect(histogram.counts[1]).toBe(1);
    expect(histogram.counts[3]).toBe(2);
    expect(histogram.counts[7]).toBe(1);
    expect(histogram.counts[20]).toBe(1);
    expect(histogram.most).toBe(2);
  });

  it('forgets what it held, and counts what lies outside at its edges', () => {
    const histogram = createHistogram(1, 5, 0);
    countInto(histogram, Float64Array.of(3, 3, 3));
    countInto(histogram, Float64Array.of(-4, 99));
    expect(histogram.counts[0]).toBe(1);
    expect(histogram.counts.at(-1)).toBe(1);
    expect(histogram.most).toBe(1);
    expect(histogram.counts.reduce((sum, count) => sum + count, 0)).toBe(2);
  });
});

describe('a table of an hour at 1 kHz', () => {
  const SWITCHES = 3600;
  const ROWS = 400;
  const random = (seed: number) => {
    let state = seed;
    return () => {
      state = (Math.imul(state, 1664525) + 1013904223) >>> 0;
      return state / 4294967296;
    };
  };
  const next = random(5);
  const rows = Array.from({ length: ROWS }, (_, i) => {
    const warnings = Math.round(12_000 * (1 - i / ROWS)) + 1;
    return operatingRow({
      threshold: 0.5 + i / 100,
      recording: new Uint16Array(warnings),
      at: Float64Array.from({ length: warnings }, (_, w) => (3600 * w) / warnings),
      outcome: Uint8Array.from({ length: warnings }, () => Math.floor(next() * 5)),
      switches: Uint8Array.from({ length: SWITCHES }, () => 1 + Math.floor(next() * 3)),
      leads: Float64Array.from({ length: Math.round(SWITCHES * 0.8) }, () => 0.2 + 0.8 * next()),
    });
  });
  const starts = Float64Array.of(0);
  const places = Float64Array.from({ length: SWITCHES }, (_, i) => i);
  const histogram = createHistogram(0.2, 1, 0);
  const warnings = outcomesOf(rows, ({ outcome }) => outcome, WARNING_OUTCOMES);

  it('is looked up in well under a frame, every threshold of it', () => {
    let drawn = 0;
    let slowest = 0;
    for (const each of rows) {
      const began = performance.now();
      for (const lane of warningLanes(each, starts, warnings)) drawn += lane.count;
      for (const lane of switchLanes(each, places, ['warned', 'late', 'missed'])) drawn += lane.count;
      countInto(histogram, each.leads);
      slowest = Math.max(slowest, performance.now() - began);
    }
    expect(drawn).toBe(rows.reduce((sum, each) => sum + each.at.length + SWITCHES, 0));
    // on a busy machine the slowest of 400 may hit a pause; a frame is 16 ms, the promise is 50 ms
    expect(slowest).toBeLessThan(50);
  });
});
