import { describe, expect, it } from 'vitest';
import { type VerdictTask, verdictOf } from '../../../server/rehearsal/verdict.ts';
import type { Score } from '../../../shared-types/score.ts';

const interval = (value: number | null) => ({ value, low: value, high: value });
const score: Score = {
  switches: { total: 43, warned: 41, late: 1, missed: 1, blind: 0 },
  warnings: { total: 60, true: 41, repeat: 10, late: 1, false: 8, open: 0, unseen: 0, acted: 0 },
  detection: interval(41 / 43),
  cameTrue: interval(0.82),
  falseRatio: interval(0.16),
  falsePerHour: interval(0.8),
  lead: { median: 12, p10: 10, p90: 15, random: 13 },
  tau: 0.3,
  skill: 0.65,
  skillShare: 0.9,
  pValue: 0.001,
  watchedSeconds: 36_000,
};
const task: VerdictTask = {
  score,
  variable: 'forcing',
  ceiling: { falsePerHour: null, cameTrue: null },
  rival: { name: 'level rising', skill: 0.4, value: 0.25, low: 0.1, high: 0.4 },
  level: { name: 'level rising', skill: 0.4 },
  outside: null,
  fittedOnJudged: false,
  levelChosenFreely: true,
  perfect: 0.7,
  word: 'reversal',
  perHour: 8,
  judgedShare: 0.5,
};
const few = { ...score, switches: { total: 6, warned: 3, late: 0, missed: 3, blind: 0 } };
const equal = { name: 'level rising', skill: 0.64, value: 0.01, low: -0.05, high: 0.07 };

/** The verdict's kind and sentence. */
const of = (changes: Partial<VerdictTask>, scored: Partial<Score> = {}) =>
  verdictOf({ ...task, ...changes, score: { ...(changes.score ?? score), ...scored } });

describe('the verdict', () => {
  it('is useful when nothing speaks against it, with its figures', () => {
    const { kind, than, sentence } = of({});
    expect([kind, than]).toEqual(['useful', null]);
    for (const figure of ['0.65', '90 %', '0.25', 'level rising', '82 %', '0.001'])
      expect(sentence).toContain(figure);
  });

  it('is too few events below ten, whatever else holds, and says how much more to record', () => {
    const { kind, sentence } = of({ score: few, rival: equal }, { pValue: 0.5 });
    expect(kind).toBe('too few events');
    // 4 missing at 8 · 0.5 judged an hour
    expect(sentence).toMatch(/6 reversals judged.*about 60 min more/);
    const ten = { ...score, switches: { total: 12, warned: 5, late: 2, missed: 3, blind: 2 } };
    expect(of({ score: ten }).kind).toBe('useful');
  });

  it('is no skill from p = 0.01 on, and where there is no p-value', () => {
    expect(of({ rival: equal }, { pValue: 0.01 }).kind).toBe('no skill');
    expect(of({}, { pValue: null }).kind).toBe('no skill');
    expect(of({}, { pValue: 0.0099 }).kind).toBe('useful');
  });

  it('is no better than a baseline when the interval of the difference includes zero or lies below', () => {
    for (const low of [-0.1, 0]) {
      const { kind, than, sentence } = of({ rival: { ...equal, low } }, { cameTrue: interval(0.3) });
      expect([kind, than]).toEqual(['no better than', 'level rising']);
      expect(sentence).toContain('level rising');
    }
    expect(of({ rival: { ...equal, value: -0.3, low: -0.4, high: -0.2 } }).kind).toBe('no better than');
    expect(of({ rival: { ...equal, low: 0.001 } }).kind).toBe('useful');
  });

  it('is weak when fewer than half come true or it lies outside the ceiling', () => {
    expect(of({}, { cameTrue: interval(0.49) }).kind).toBe('weak');
    expect(of({ ceiling: { falsePerHour: 0.7, cameTrue: null } }).kind).toBe('weak');
    expect(of({ ceiling: { falsePerHour: 0.9, cameTrue: null } }).kind).toBe('useful');
    expect(of({ ceiling: { falsePerHour: null, cameTrue: 0.9 } }).kind).toBe('weak');
  });

  it('says that the ceiling was broken also where that is not the reason', () => {
    const ceiling = { falsePerHour: 0.7, cameTrue: null };
    expect(of({ ceiling }, { pValue: 0.5 }).sentence).toContain('Nor does it keep within what was asked for');
    expect(of({ rival: equal, ceiling }).sentence).toMatch(
      /Nor does it keep .* outside the ceiling of 0\.7\.$/,
    );
    expect(of({ rival: equal }).sentence).not.toContain('Nor does');
  });

  it('is never useful when the model was fitted on what is judged', () => {
    const { kind, sentence } = of({ fittedOnJudged: true });
    expect(kind).toBe('weak');
    expect(sentence).toContain('fitted on data judged here');
  });

  it('says so when a plain level is the answer, and when the horizon is too long', () => {
    expect(of({ variable: 'level rising' }).sentence).toContain('A plain level is the answer');
    expect(of({ variable: 'level rising', levelChosenFreely: false }).sentence).not.toContain('plain level');
    expect(of({ perfect: 0.19 }, { skillShare: null }).sentence).toContain('The horizon is too long');
  });

  it('says what to do when a plain level is as good: how to watch it', () => {
    expect(of({ rival: equal }).sentence).toMatch(
      /Watch the level then: rehearse again with a plain level .*\(--variable level\)\.$/,
    );
  });

  it('says of a baseline that cannot be watched that it cannot, and which level can where that is as good', () => {
    const rival = { ...equal, name: 'distance from the mean falling', skill: 0.7 };
    const near = of({ rival, level: { name: 'level falling', skill: 0.66 } }).sentence;
    expect(near).toMatch(
      /A watch cannot be set on distance from the mean, but on the level falling, whose skill is 0\.66: .*--variable level/,
    );
    for (const level of [null, { name: 'level falling', skill: 0.2 }]) {
      const { kind, than, sentence } = of({ rival, level });
      expect([kind, than]).toEqual(['no better than', 'distance from the mean falling']);
      expect(sentence).toMatch(/go by that itself, or watch the forcing/);
      expect(sentence).not.toContain('--variable');
    }
  });

  it('lets a level that was chosen be watched as it is, whatever plain reading is as good or better', () => {
    const variable = 'level rising';
    const other = { ...equal, name: 'level falling' };
    expect(of({ variable, rival: other }).sentence).toMatch(
      /that of the level rising, chosen here, 0\.65; .*can be watched as it is\.$/,
    );
    const better = { name: 'running variance rising', skill: 0.8, value: -0.15, low: -0.2, high: -0.1 };
    expect(of({ variable, rival: better }).sentence).toMatch(
      /can be watched as it is, but going by running variance warns better\.$/,
    );
  });

  it('names a baseline with more skill that the ceiling leaves out', () => {
    const outside = { name: 'a clock', skill: 0.9 };
    const { kind, sentence } = of({ outside, ceiling: { falsePerHour: 1, cameTrue: null } });
    expect(kind).toBe('useful');
    expect(sentence).toContain('a clock has more, 0.9, but does not keep within what was asked for');
  });

  it('counts rates and spans in units that fit the recording', () => {
    const years = { watchedSeconds: 20 * 31_557_600, falsePerHour: interval(1 / 8766) };
    const ceiling = { falsePerHour: 0.5 / 8766, cameTrue: null };
    expect(of({ ceiling }, years).sentence).toMatch(
      /^Weak: 1 false warning a year, outside the ceiling of 0\.5/,
    );
    const slow = of({ score: few, perHour: 0.2 / 8766, judgedShare: 0.5 });
    expect(slow.sentence).toContain('about 40 years more of recording');
  });
});
