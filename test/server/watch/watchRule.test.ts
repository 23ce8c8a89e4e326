import { describe, expect, it } from 'vitest';
import {
  createWatchRuleState,
  steppedRule,
  stepWatchRule,
  watchRuleWithDefaults,
} from '../../../server/watch/watchRule.ts';
import type { WatchRule } from '../../../shared-types/watch.ts';

const rule = (changes: Partial<WatchRule> = {}): WatchRule => ({
  variable: 'forcing',
  direction: 'rising',
  threshold: 2,
  rearm: 1,
  onDelay: 0,
  holdOff: 0,
  leastLead: 1,
  horizon: 5,
  ...changes,
});

const warned = (values: number[], changes: Partial<WatchRule> = {}): number[] => {
  const state = createWatchRuleState();
  const stepped = steppedRule(rule(changes), 1);
  return values.flatMap((value, step) => (stepWatchRule(state, stepped, step, value) ? [step] : []));
};

describe('the watch rule', () => {
  it('warns at the first step above the threshold, and not at it', () => {
    expect(warned([0, 2, 2.1, 3])).toEqual([2]);
  });

  it('warns again only once the variable was below re-arm', () => {
    expect(warned([3, 1, 3, 0.9, 3])).toEqual([0, 4]);
  });

  it('wants the variable above the threshold for the whole on-delay', () => {
    expect(warned([3, 3, 0, 3, 3, 3, 3], { onDelay: 2 })).toEqual([5]);
  });

  it('passes over a rise during hold-off instead of keeping it for later', () => {
    expect(warned([3, 0, 3, 3, 3, 3, 3], { holdOff: 4 })).toEqual([0]);
    expect(warned([3, 0, 3, 0, 3], { holdOff: 4 })).toEqual([0, 4]);
  });

  it('watches a falling level from above', () => {
    expect(warned([5, 3, 1.9, 1, 3.1, 1], { direction: 'falling', threshold: 2, rearm: 3 })).toEqual([2, 5]);
  });

  it('has re-arm, on-delay and hold-off by default', () => {
    const made = watchRuleWithDefaults({ variable: 'forcing', threshold: 2, leastLead: 1, horizon: 5 });
    expect(made).toEqual(rule({ rearm: 1.6, holdOff: 4 }));
    const level = watchRuleWithDefaults({
      variable: 'level',
      direction: 'rising',
      threshold: -5,
      leastLead: 1,
      horizon: 5,
    });
    expect(level.rearm).toBe(-6);
  });

  it('refuses a horizon within the least lead and a re-arm beyond the threshold, in a sentence', () => {
    expect(() => steppedRule(rule({ leastLead: 5 }), 1)).toThrow(/longer than the least lead/);
    expect(() => steppedRule(rule({ rearm: 2.5 }), 1)).toThrow(/could warn without pause/);
  });
});
