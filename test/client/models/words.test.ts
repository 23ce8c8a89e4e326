import { describe, expect, it } from 'vitest';
import { pick } from '../../../client/models/list.ts';
import { namesAt } from '../../../client/models/page.ts';
import { decadesOf, densitiesOf, gaussian, inkOf } from '../../../client/models/scales.ts';
import {
  forcingText,
  heldOutText,
  inOrder,
  promiseLine,
  ruleText,
  scoreRows,
  usesText,
} from '../../../client/models/words.ts';
import type { ModelSummary } from '../../../shared-types/model.ts';
import type { Score } from '../../../shared-types/score.ts';
import type { WatchRule, WatchState } from '../../../shared-types/watch.ts';

const rule: WatchRule = {
  variable: 'level',
  direction: 'falling',
  threshold: -1.25,
  rearm: -1,
  onDelay: 0,
  holdOff: 10,
  leastLead: 2.5,
  horizon: 20,
};
const share = (value: number | null) => ({ value, low: value, high: value });
const score: Score = {
  switches: { total: 40, warned: 38, late: 1, missed: 1, blind: 0 },
  warnings: { total: 42, true: 38, repeat: 2, late: 1, false: 1, open: 0, unseen: 0, acted: 0 },
  detection: share(0.95),
  cameTrue: share(0.9),
  falseRatio: share(0.1),
  falsePerHour: { value: 1.234, low: 0.4, high: 3 },
  lead: { median: 15, p10: 12, p90: 18, random: 9 },
  tau: 0.4,
  skill: 0.55,
  skillShare: 0.75,
  pValue: 0.001,
  watchedSeconds: 3600,
};
const model = (name: string, fittedAt: string) => ({ name, fittedAt }) as ModelSummary;
const watch = (model: string, use: WatchState['use'], channel = 'loop') =>
  ({ model, use, channels: [channel] }) as WatchState;

describe('a model in words', () => {
  it('says what it warns of, and that it does not without a rule', () => {
    expect(ruleText(rule, 'K')).toBe('level below −1.25 K, 2.5 to 20 s ahead');
    expect(ruleText({ ...rule, variable: 'forcing', direction: 'rising', threshold: 1.5 }, 'K')).toBe(
      'forcing above 1.5 sd, 2.5 to 20 s ahead',
    );
    expect(ruleText(null, 'K')).toContain('never warns');
  });

  it('says what rehearsal promised', () => {
    expect(promiseLine(score, 'reversal')).toBe(
      '95 of 100 reversals warned, 90 of 100 warnings came true, usual lead 15 s',
    );
    expect(promiseLine(null, 'reversal')).toBeNull();
    expect(scoreRows(score, 'switch')[0]).toEqual(['Switches warned', '95 %', '95 % interval 95 to 95']);
    expect(scoreRows({ ...score, falsePerHour: share(null), skillShare: null }, 'switch')[2]![1]).toBe('–');
  });

  it('says who uses it; those taken out of use do not', () => {
    expect(usesText('a', [watch('a', 'in use'), watch('a', 'on trial', 'duct'), watch('b', 'in use')])).toBe(
      'loop: in use; duct: on trial',
    );
    expect(usesText('a', [watch('a', 'taken out of use')])).toBe('not used');
  });

  it('tells a bursting forcing from one that swings', () => {
    expect(forcingText({ kurtosis: 5, share: 0.05 })).toContain('bursts now and then');
    expect(forcingText({ kurtosis: -0.9, share: 0.02 })).toContain('swings rather than bursts');
    expect(heldOutText(null, 10)).toContain('too short');
    expect(heldOutText({ oneStepR2: [0.9], freeRunCorrelation: 0.957 }, 10)).toContain('0.96');
  });
});

describe('the list of models', () => {
  it('has those in use first, then those on trial, then the newest', () => {
    const models = [
      model('old', '2026-01-01'),
      model('new', '2026-03-01'),
      model('tried', '2026-02-01'),
      model('used', '2025-01-01'),
    ];
    const order = inOrder(models, [watch('used', 'in use'), watch('tried', 'on trial')]);
    expect(order.map(({ name }) => name)).toEqual(['used', 'tried', 'new', 'old']);
  });

  it('reads one, or lays a second beside it, never a third', () => {
    expect(pick(['a'], 'b', false)).toEqual(['b']);
    expect(pick(['a'], 'b', true)).toEqual(['a', 'b']);
    expect(pick(['a', 'b'], 'c', true)).toEqual(['a', 'c']);
    expect(pick(['a', 'b'], 'a', true)).toEqual(['b']);
    expect(pick(['a'], 'a', true)).toEqual(['a']);
  });

  it('finds names with any signs in the address, at most two', () => {
    const names = ['loop & leg', '50 % of it', 'c'];
    expect(namesAt(names.map(encodeURIComponent).join('&'))).toEqual(names.slice(0, 2));
    expect(namesAt('')).toEqual([]);
    expect(namesAt('100%')).toEqual(['100%']);
  });
});

describe('scales of the evidence', () => {
  it('frames values with whole decades', () => {
    expect(decadesOf([12, 1500])).toEqual([1, 4]);
    expect(decadesOf([10])).toEqual([1, 2]);
    expect(decadesOf([0])).toEqual([0, 1]);
  });

  it('makes densities that integrate to 1, beside the normal density 0.3989 at 0 (NIST/SEMATECH e-Handbook 1.3.6.6.1)', () => {
    const bars = densitiesOf({ from: -1, width: 0.5, counts: [1, 3, 4, 2] });
    expect(bars.reduce((sum, { density }) => sum + density * 0.5, 0)).toBeCloseTo(1, 12);
    expect(bars[0]).toEqual({ x: -0.75, density: 0.2 });
    expect(gaussian(0)).toBeCloseTo(0.3989, 4);
    expect(inkOf(-2, 4)).toBe(0.5);
    expect(inkOf(0, 0)).toBe(0);
  });
});
