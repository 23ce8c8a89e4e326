import { describe, expect, it } from 'vitest';
import {
  type ConfirmedSwitch,
  createRegimeState,
  settledUntil,
  steppedRegime,
  stepRegime,
} from '../../../server/watch/regimeRule.ts';
import { parseRegimeRule, regimeRuleText } from '../../../server/watch/regimeRuleText.ts';

const run = (text: string, values: number[], interval = 1): ConfirmedSwitch[] => {
  const regime = steppedRegime(parseRegimeRule(text), interval);
  const state = createRegimeState(regime);
  return values.flatMap((value, i) => stepRegime(state, regime, i * interval, value) ?? []);
};

describe('sides', () => {
  it('stamps the last crossing of the middle before the far level is reached', () => {
    expect(run('sides:-1,1', [-2, 0.5, -0.5, 0.2, 0.8, 1.5])).toEqual([
      { at: 3, confirmedAt: 5, from: 0, to: 1 },
    ]);
  });
  it('calls no switch when the signal starts between or turns back', () => {
    expect(run('sides:-1,1', [0, 0.5, 2, 0.5, -0.5, 0.5, 2])).toEqual([]);
  });
  it('stamps a jump from side to side with the sample that made it', () => {
    expect(run('sides:-1,1', [-2, 2, -2])).toEqual([
      { at: 1, confirmedAt: 1, from: 0, to: 1 },
      { at: 2, confirmedAt: 2, from: 1, to: 0 },
    ]);
  });
  it('keeps one direction when told to', () => {
    expect(run('sides:-1,1,to=down', [-2, 2, -2]).map(({ at }) => at)).toEqual([2]);
  });
  it('is not settled while a crossing may still become a switch', () => {
    const regime = steppedRegime(parseRegimeRule('sides:-1,1'), 1);
    const state = createRegimeState(regime);
    const settled = [-2, 0.5, 0.6, -0.1, 0.3, 2].map((value, i) => {
      stepRegime(state, regime, i, value);
      return settledUntil(state, regime);
    });
    expect(settled).toEqual([0, 0, 0, 3, 3, 5]);
  });
});

describe('levels', () => {
  it('numbers the bands and wants half the deadband beyond the parting level', () => {
    expect(run('levels:1,2,deadband=0.2', [0, 1.05, 1.2, 2.3, 0.5])).toEqual([
      { at: 1, confirmedAt: 2, from: 0, to: 1 },
      { at: 3, confirmedAt: 3, from: 1, to: 2 },
      { at: 4, confirmedAt: 4, from: 2, to: 0 },
    ]);
  });
});

describe('excursion and dip', () => {
  it('counts a rise through the level once until the signal was below re-arm', () => {
    expect(run('excursion:5,4,0', [0, 6, 4.5, 6, 3, 6]).map(({ at }) => at)).toEqual([1, 5]);
  });
  it('takes excursions within the gap as one', () => {
    expect(run('excursion:5,4,3', [0, 6, 3, 6, 3, 3, 3, 3, 6]).map(({ at }) => at)).toEqual([1, 8]);
  });
  it('calls no switch when it begins above', () => {
    expect(run('excursion:5,4,0', [6, 7, 6])).toEqual([]);
  });
  it('does the same downward', () => {
    expect(run('dip:1,2,0', [3, 0, 1.5, 0, 2.5, 0]).map(({ at }) => at)).toEqual([1, 5]);
  });
});

describe('burst', () => {
  it('stamps the first sample of the window whose RMS rose through the level', () => {
    // RMS over 4 samples of 0 0 2 2 is √2
    expect(run('burst:4,1.4,1', [0, 0, 0, 0, 2, 2, 2])).toEqual([{ at: 2, confirmedAt: 5, from: 0, to: 1 }]);
  });
});

describe('marks', () => {
  it('switches where the channel leaves zero, and not when it begins elsewhere', () => {
    expect(run('marks:valve', [1, 0, 0, 3, 3, 0, 1]).map(({ at }) => at)).toEqual([3, 6]);
  });
});

describe('the text of a rule', () => {
  it.each([
    'sides:-0.8,0.8',
    'levels:1,2,deadband=0.1,to=up',
    'excursion:5,4,2',
    'dip:1,2,0',
    'burst:3,0.5,0.3',
    'marks:valve 2',
  ])('%s is read and written back', (text) => {
    expect(regimeRuleText(parseRegimeRule(text))).toBe(text);
  });
  it.each([
    ['tides:1,2', /is no rule/],
    ['sides:1', /has 1 numbers, expected 2/],
    ['sides:2,1', /LOW must be below HIGH/],
    ['sides:a,1', /"a" in .* is not a number/],
    ['levels:', /names no level/],
    ['levels:2,1', /must ascend/],
    ['excursion:4,5,0', /quiet side/],
    ['dip:4,3,0', /quiet side/],
    ['dip:3,4,0,to=up', /only to=down/],
    ['sides:0,1,upto=3', /not understood/],
    ['marks:', /must name one channel/],
  ])('%s is refused in a sentence', (text, words) => {
    expect(() => parseRegimeRule(text)).toThrow(words);
  });
});
