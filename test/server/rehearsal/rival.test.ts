import { describe, expect, it } from 'vitest';
import type { Verdictable } from '../../../server/rehearsal/judge.ts';
import { leftOutByCeiling, rivalOf } from '../../../server/rehearsal/rival.ts';
import { createRandom } from '../../../server/signal/random.ts';

const NONE = { falsePerHour: null, cameTrue: null };
const ONE_AN_HOUR = { falsePerHour: 1, cameTrue: null };

/** A warner that warned of so many of 20 switches and never lay in a span; weak: its tuning kept within nothing. */
function judged(name: string, warned: number, weak = false): Verdictable {
  const each = Array.from({ length: 20 }, (_, i) => Number(i < warned));
  return {
    tuned: { signal: { name }, weak } as Verdictable['tuned'],
    point: { skill: warned / 20 } as Verdictable['point'],
    curve: [],
    blocks: {
      counted: Uint8Array.from(each, () => 1),
      warned: Uint8Array.from(each),
      watched: Int32Array.from(each, () => 10),
      spanned: Int32Array.from(each, () => 0),
    },
    medianLead: null,
  };
}
const ours = judged('forcing', 12);
const baselines = [judged('level rising', 8), judged('time since the last switch', 13, true)];
const nameOf = (given: ReturnType<typeof rivalOf>) => given?.judged.tuned.signal.name ?? null;
const rival = (mine: Verdictable, others: Verdictable[], ceiling: typeof NONE | typeof ONE_AN_HOUR) =>
  rivalOf(mine, others, ceiling, createRandom(1).uniform);

describe('the baseline to beat', () => {
  it('is the one with the highest skill, also where fewer than half of its warnings came true', () => {
    expect(nameOf(rival(ours, baselines, NONE))).toBe('time since the last switch');
  });

  it('is there however poor all baselines are', () => {
    const poor = [judged('level rising', 1, true), judged('a clock', 0, true)];
    expect(nameOf(rival(ours, poor, NONE))).toBe('level rising');
    expect(nameOf(rival(ours, poor, ONE_AN_HOUR))).toBe('level rising');
  });

  it('keeps within a ceiling that a person set, unless the chosen one did not either', () => {
    expect(nameOf(rival(ours, baselines, ONE_AN_HOUR))).toBe('level rising');
    expect(nameOf(rival(judged('forcing', 12, true), baselines, ONE_AN_HOUR))).toBe(
      'time since the last switch',
    );
  });

  it('is compared by the skills that both have', () => {
    const { skill, value } = rival(ours, baselines, ONE_AN_HOUR)!.difference;
    expect(skill).toBe(0.4);
    expect(value).toBeCloseTo(0.2, 12);
  });

  it('is nobody where nothing could be judged', () => {
    expect(rival({ ...ours, point: null }, baselines, NONE)).toBeNull();
    expect(rival(ours, [{ ...baselines[0]!, point: null }], NONE)).toBeNull();
  });
});

describe('the baseline that a ceiling leaves out', () => {
  const leftOut = (others: Verdictable[], ceiling: typeof NONE | typeof ONE_AN_HOUR) =>
    leftOutByCeiling(ours, others, ceiling)?.tuned.signal.name ?? null;

  it('is named where it has more skill than the chosen one, and only then', () => {
    expect(leftOut(baselines, ONE_AN_HOUR)).toBe('time since the last switch');
    expect(leftOut(baselines, NONE)).toBeNull();
    expect(leftOut([judged('level rising', 8), judged('a clock', 11, true)], ONE_AN_HOUR)).toBeNull();
  });
});
