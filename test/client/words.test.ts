import { describe, expect, it } from 'vitest';
import {
  aheadText,
  badgeOf,
  channelRemarks,
  clockText,
  counted,
  decimalsFor,
  factsText,
  intervalText,
  leftOutText,
  likenessText,
  minuteText,
  numberText,
  plural,
  shareText,
  sightText,
  spanText,
} from '../../client/words.ts';
import { channel } from './fixtures.ts';

const NOW = Date.UTC(2024, 2, 5, 14, 32, 7) / 1000;

describe('numbers', () => {
  it('carry a true minus sign, a plus where it is wanted, and no sign at zero', () => {
    expect(numberText(-2.594, 2)).toBe('−2.59');
    expect(numberText(0.96, 2, true)).toBe('+0.96');
    expect(numberText(-0.001, 2, true)).toBe('0.00');
  });

  it('have as many decimals as the paper resolves', () => {
    expect([8, 80, 800, 0.8].map(decimalsFor)).toEqual([2, 1, 0, 3]);
    expect(decimalsFor(0)).toBe(2);
  });

  it('are spans of time with their unit', () => {
    expect([0.2, 3, 16.2, 100, 130, 3600, 7500, 200_000].map(spanText)).toEqual([
      '0.2 s',
      '3 s',
      '16 s',
      '100 s',
      '2 min 10 s',
      '1 h 00 min',
      '2 h 05 min',
      '2 d 7 h',
    ]);
  });

  it('are counted with the plural of their word', () => {
    expect(counted(1, 'reversal')).toBe('1 reversal');
    expect(counted(0, 'frame')).toBe('0 frames');
    expect(['switch', 'burst', 'instability', 'relay'].map(plural)).toEqual([
      'switches',
      'bursts',
      'instabilities',
      'relays',
    ]);
  });

  it('are spans ahead, finer when they are near', () => {
    expect(aheadText(3.6, 13.6)).toBe('4 – 14 s');
    expect(aheadText(0.2, 0.7)).toBe('0.2 – 0.7 s');
    expect(aheadText(-2, 8)).toBe('0 – 8 s');
    expect(aheadText(120, 300)).toBe('2.0 – 5.0 min');
  });

  it('are shares out of a hundred with their interval, or nothing', () => {
    const share = { value: 0.97, low: 0.92, high: 0.99 };
    expect(shareText(share)).toBe('97 of 100');
    expect(intervalText(share)).toBe('95 % interval 92 to 99');
    expect(shareText({ value: null, low: null, high: null })).toBeNull();
    expect(intervalText(undefined)).toBeNull();
  });
});

describe('times', () => {
  it('are of the day in UTC, with parts of a second when wanted', () => {
    expect(clockText(NOW)).toBe('14:32:07');
    expect(clockText(NOW + 0.42, 1)).toBe('14:32:07.4');
  });

  it('are called elapsed when they are', () => {
    expect(clockText(3727)).toBe('1:02:07 elapsed');
  });

  it('name the day only when it is another', () => {
    expect(minuteText(NOW, NOW)).toBe('14:32');
    expect(minuteText(NOW - 2 * 86400, NOW)).toBe('3 March 14:32');
  });
});

describe('states are said in words', () => {
  it('says why a watch does not count what comes, the silent channel it waits for first', () => {
    expect(leftOutText({ leftOut: 'calibration', waitsFor: null })).toBe('left out: calibration');
    expect(leftOutText({ leftOut: 'bath above 30', waitsFor: 'bath' })).toMatch(
      /^waiting for bath, which is silent/,
    );
    expect(leftOutText({ leftOut: null, waitsFor: null })).toBeNull();
  });

  it('says how long a watch is blind yet, and nothing when it sees', () => {
    expect(sightText({ kind: 'blind', left: 0.2 })).toBe('blind: 0.2 s until the window is full');
    expect(sightText({ kind: 'seeing' })).toBeNull();
  });

  it('says whether the data are like the training data', () => {
    expect(likenessText({ kind: 'like' }, NOW)).toBe('data like the training data');
    expect(likenessText({ kind: 'unlike', since: NOW - 36 }, NOW)).toBe('data unlike the model since 14:31');
  });

  it('doubles every alarm state by a word and none but the normal one goes without a shape', () => {
    const states = [
      'unacknowledged',
      'acknowledged',
      'returned to normal, unacknowledged',
      'shelved',
      'out of service',
    ] as const;
    const marks = states.map((state) => {
      expect(badgeOf(state).words).toBe(state);
      return badgeOf(state).mark;
    });
    expect(new Set(marks).size).toBe(states.length);
    expect(marks).not.toContain('');
  });

  it('says what is the matter with a channel, and nothing when nothing is', () => {
    expect(channelRemarks(channel())).toEqual([]);
    const newest = NOW - 115;
    const remarks = channelRemarks(
      channel({ silent: true, newest, saturated: 0.2, clockOffset: 3.2, refused: 1, refusal: 'not JSON' }),
    );
    expect(remarks).toEqual([
      'silent since 14:30:12',
      'saturated: 20 of 100 samples at the sensor’s limit',
      'its data come 3.2 s late',
      '1 frame refused: not JSON',
    ]);
  });

  it('calls a clock wrong when it is ahead, or stays behind; what comes late for a while is late', () => {
    expect(channelRemarks(channel({ clockOffset: -12 }))).toEqual([
      'its clock is 12 s ahead of the server’s',
    ]);
    expect(channelRemarks(channel({ clockOffset: 40, clockWrong: true }))).toEqual([
      'its clock is 40 s behind the server’s, or its data come that late',
    ]);
    expect(channelRemarks(channel({ clockOffset: 0.4 }))).toEqual([]);
  });
});

describe('the line of facts', () => {
  it('says how many channels, how fast, and that nothing was missed', () => {
    const first = Date.UTC(2024, 2, 5, 11, 20) / 1000;
    const two = [channel({ first }), channel({ first: first + 5 })];
    expect(factsText(two, false, NOW)).toBe('2 channels · 2.5 samples/s each · nothing missed since 11:20');
  });

  it('says what was missed', () => {
    const text = factsText([channel({ holes: 2, gaps: 1, refused: 3, first: null, rate: null })], true, NOW);
    expect(text).toBe('demo, 1 channel · 2 frames never came, 3 frames refused, 1 gap');
  });

  it('gives the range of unequal rates and leaves silent channels out of it', () => {
    const three = [channel({ rate: 2.5 }), channel({ rate: 50 }), channel({ rate: 900, silent: true })];
    expect(factsText(three, false, NOW)).toContain('2.5 to 50 samples/s');
  });
});
