import { describe, expect, it } from 'vitest';
import { type GradingRecord, gradeSwitch, gradeWarning } from '../../../server/watch/grading.ts';

// M = 2, H = 5 steps of a second
const spans = { interval: 1, leastLead: 2, horizon: 5 };
const record = (
  warnings: number[],
  switches: number[],
  changes: Partial<GradingRecord> = {},
): GradingRecord => ({
  warnings,
  switches,
  sight: [{ from: 0, to: 1000 }],
  unseen: [],
  ...changes,
});
const outcomes = (one: GradingRecord, end = 1000) =>
  one.warnings.map((_, i) => gradeWarning(one, i, spans, end).outcome);

describe('a switch', () => {
  it.each([
    [94, 'missed'],
    [95, 'warned'],
    [97, 'warned'],
    [98, 'late'],
    [100, 'late'],
    [101, 'missed'],
  ])('at step 100 with a warning at step %i is %s', (warning, outcome) => {
    expect(gradeSwitch(record([warning], [100]), 100, spans).outcome).toBe(outcome);
  });
  it('takes its lead from the first warning that covers it', () => {
    expect(gradeSwitch(record([94, 96, 97], [100]), 100, spans)).toEqual({
      outcome: 'warned',
      warning: 1,
      lead: 4,
    });
  });
  it('is blind when no step in [e − H, e − M) had a full window', () => {
    const blind = (from: number, to: number) =>
      gradeSwitch(record([], [100], { sight: [{ from, to }] }), 100, spans).outcome;
    expect(blind(98, 200)).toBe('blind');
    expect(blind(97, 200)).toBe('missed');
    expect(blind(0, 94)).toBe('blind');
    expect(blind(0, 95)).toBe('missed');
  });
});

describe('a warning', () => {
  it('is true when it is the first to cover some switch, repeat when the switch was warned already', () => {
    expect(outcomes(record([95, 96, 97, 98], [100]))).toEqual(['true', 'repeat', 'repeat', 'repeat']);
  });
  it('is late when an unwarned switch follows within the least lead', () => {
    expect(outcomes(record([98], [100]))).toEqual(['late']);
    expect(outcomes(record([100], [100]))).toEqual(['late']);
  });
  it('is false when nothing follows within the horizon', () => {
    expect(outcomes(record([94, 101], [100]))).toEqual(['false', 'false']);
  });
  it('is true for a second switch although the first was warned', () => {
    expect(outcomes(record([95, 97], [100, 102]))).toEqual(['true', 'true']);
  });
  it('is late for an unwarned switch although a warned one follows it as well', () => {
    // the warning at 94 covers 99 but not 100
    expect(outcomes(record([94, 98], [99, 100]))).toEqual(['true', 'late']);
  });
  it('is open when the record ends before its horizon, and unseen when the regime channel had a gap in its span', () => {
    expect(outcomes(record([95], []), 99)).toEqual(['open']);
    expect(outcomes(record([95], []), 100)).toEqual(['false']);
    expect(outcomes(record([95], [], { unseen: [{ from: 97.5, to: 98.5 }] }))).toEqual(['unseen']);
    expect(outcomes(record([95], [], { unseen: [{ from: 100, to: 110 }] }))).toEqual(['false']);
    expect(outcomes(record([95], [99], { unseen: [{ from: 97.5, to: 98.5 }] }))).toEqual(['true']);
  });
});
