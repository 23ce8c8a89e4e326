/**
 * Figures of the alarm standards: ANSI/ISA-18.2-2016, IEC 62682:2014, EEMUA Publication 191 (3rd edition, 2013), values as
 * several independent public summaries print them: about 1 call per 10 minutes (6 an hour) very likely acceptable, about
 * 2 (12 an hour) the most that is manageable; at most 10 in any 10 minutes; fewer than about 1 % of 10-minute periods
 * above 10 (one summary: above 5), of hours above 30, of time in flood (from above 10 per 10 minutes to below 5);
 * chattering commonly three within a minute; stale beyond 24 h. The cases are made by hand.
 */
import { describe, expect, it } from 'vitest';
import { countsIn, figuresOf, floodSeconds, mostWithin, STANDARD } from '../../../client/logbook/figures.ts';
import { callSentences, factsOf, ratingOf, shortSentence } from '../../../client/logbook/figuresWords.ts';
import type { WarningTimes } from '../../../shared-types/logbook.ts';

const T0 = 1_700_000_000;

/** Warnings of watch "a" at these seconds after T0, each called for, acknowledged and over after ten seconds. */
function times(seconds: number[], span: number, changes: Partial<WarningTimes> = {}): WarningTimes {
  return {
    since: T0,
    now: T0 + span,
    watches: ['a'],
    watch: seconds.map(() => 0),
    madeAt: seconds.map((second) => T0 + second),
    called: seconds.map(() => true),
    acknowledgedAt: seconds.map((second) => T0 + second + 1),
    stood: seconds.map(() => 10),
    cut: false,
    ...changes,
  };
}

const every = (step: number, count: number, from = 0) =>
  Array.from({ length: count }, (_, i) => from + i * step);

describe('rates', () => {
  it('are calls over the time looked at, and none where that is shorter than their unit', () => {
    const hour = figuresOf(times(every(600, 6), 3600));
    expect([hour.perTenMinutes, hour.perHour]).toEqual([1, 6]);
    const half = figuresOf(times([100, 200, 300], 1800));
    expect([half.perTenMinutes, half.perHour]).toEqual([1, null]);
    expect(figuresOf(times([100], 599)).perTenMinutes).toBeNull();
  });

  it('count only warnings that called somebody', () => {
    const made = figuresOf(times([1, 2, 3], 600, { called: [true, false, false] }));
    expect([made.called, made.uncalled, made.perTenMinutes]).toEqual([1, 2, 1]);
  });

  it('are acceptable up to 1 per 10 minutes and manageable up to 2, bounds included', () => {
    expect([0, 1, 1.01, 2, 2.01].map(ratingOf)).toEqual([
      'acceptable',
      'acceptable',
      'manageable',
      'manageable',
      'too many',
    ]);
    expect(ratingOf(null)).toBeNull();
    expect(STANDARD.acceptable.perHour).toBe(6 * STANDARD.acceptable.perTenMinutes);
    expect(STANDARD.manageable.perHour).toBe(6 * STANDARD.manageable.perTenMinutes);
  });
});

describe('counts', () => {
  it('are of whole periods from the beginning; what is left over is no period', () => {
    expect(countsIn([0, 599, 600, 1799, 1800], 0, 1850, 600)).toEqual([2, 1, 1]);
    expect(countsIn([1], 0, 599, 600)).toEqual([]);
  });

  it('find the most in any ten minutes, wherever they begin', () => {
    expect(mostWithin([500, 550, 650, 700, 1099, 1100], 600)).toBe(5);
    expect(mostWithin([0, 600], 600)).toBe(1);
    expect(mostWithin([], 600)).toBe(0);
  });

  it('say how many periods and hours were beyond, by 10 and by the other summary’s 5', () => {
    const eleven = figuresOf(times([...every(10, 11), ...every(10, 6, 600)], 7200));
    expect(eleven.periods).toEqual({ of: 12, beyond: 1 });
    expect(eleven.periodsByOther).toEqual({ of: 12, beyond: 2 });
    expect(eleven.hours).toEqual({ of: 2, beyond: 0 });
    expect(figuresOf(times(every(100, 31), 7200)).hours).toEqual({ of: 2, beyond: 1 });
    expect(figuresOf(times(every(100, 30), 7200)).hours).toEqual({ of: 2, beyond: 0 });
  });
});

describe('a flood', () => {
  it('begins with the eleventh within ten minutes and ends when fewer than five are left', () => {
    // the eleventh comes at 100 s; those of 0 … 60 s are forgotten at 600 … 660 s: four are left at 660
    expect(floodSeconds(every(10, 11), 10_000)).toBe(560);
    expect(floodSeconds(every(10, 10), 10_000)).toBe(0);
  });

  it('goes on until now where it has not ended', () => {
    expect(floodSeconds(every(10, 11), 300)).toBe(200);
  });

  it('agrees with a count at every second, on many at random', () => {
    let seed = 7;
    const random = () => {
      seed = (Math.imul(seed, 1103515245) + 12345) >>> 0;
      return seed / 2 ** 32;
    };
    for (let trial = 0; trial < 20; trial++) {
      const made = Array.from({ length: 60 }, () => Math.floor(random() * 4000)).sort((a, b) => a - b);
      let slow = 0;
      let flooded = false;
      for (let second = 0; second < 5000; second++) {
        const count = made.filter((time) => time <= second && second < time + 600).length;
        if (count > 10) flooded = true;
        if (count < 5) flooded = false;
        if (flooded) slow++;
      }
      expect(floodSeconds(made, 5000)).toBe(slow);
    }
  });
});

describe('chattering, stale and forgotten warnings', () => {
  it('chatter when a watch warns three times within a minute, each watch for itself', () => {
    const made = times([0, 30, 60, 61, 300], 600, { watches: ['a', 'b'], watch: [0, 1, 0, 0, 1] });
    expect(figuresOf(made).chattering).toEqual([]);
    const one = times([0, 30, 60, 61, 300], 600);
    expect(figuresOf(one).chattering).toEqual([{ watch: 'a', times: 2 }]);
  });

  it('are stale when they stand longer than a day, whether that is over or not', () => {
    const made = times([0, 1, 2, 200_000], 200_100, { stood: [86_400, 86_401, null, null] });
    expect(figuresOf(made).stale).toBe(2);
  });

  it('are forgotten when somebody was called and nobody has come for a day', () => {
    const made = times([0, 1, 100_000], 100_100, {
      acknowledgedAt: [null, null, null],
      called: [true, false, true],
    });
    expect(figuresOf(made).forgotten).toBe(1);
  });
});

describe('the words of the figures', () => {
  it('say how often, what the standards say to it, and how little a short log says', () => {
    const words = callSentences(figuresOf(times([100, 700, 1300], 2400, { called: [true, true, false] })));
    expect(words).toEqual([
      'Somebody was called 2 times in 40 min: 0.5 per 10 minutes.',
      '1 more warning called nobody.',
      expect.stringMatching(/^That is very likely acceptable: about 1 per 10 minutes \(6 an hour\)/),
      'These are figures of 40 min; the standards speak of at least 30 days.',
    ]);
  });

  it('call nothing acceptable of a log too short for a rate', () => {
    const words = callSentences(figuresOf(times([10], 185)));
    expect(words[0]).toBe('Somebody was called once in 3 min 5 s.');
    expect(words.join(' ')).not.toMatch(/That is/);
    expect(callSentences(figuresOf(times([], 7200)))[0]).toBe('Nobody was called in 2 h 00 min.');
  });

  it('are not called short after 30 days', () => {
    expect(shortSentence(figuresOf(times([], 30 * 86_400)))).toBeNull();
    expect(shortSentence(figuresOf(times([], 29 * 86_400)))).toMatch(/29 d 0 h/);
  });

  it('mark what is beyond the standards, and nothing of a quiet hour', () => {
    const quiet = factsOf(figuresOf(times([100], 7200)), 0, (watch) => watch);
    expect(quiet.filter(({ beyond }) => beyond)).toEqual([]);
    const flooded = factsOf(figuresOf(times(every(5, 40), 7200)), 31, () => 'Loop A');
    expect(flooded.filter(({ beyond }) => beyond).map(({ name, figure }) => `${name}: ${figure}`)).toEqual([
      'Most in any 10 minutes: 40',
      '10-minute periods with more than 10: 1 of 12',
      'Hours with more than 30: 1 of 2',
      // the eleventh comes at 50 s; of the forty, four are left when the 36th is forgotten, at 775 s
      'Time in flood: 10 %',
      'Chattering: Loop A (38 times)',
      'Shelved now: 31',
    ]);
  });

  it('name the count that one summary prints differently', () => {
    const facts = factsOf(figuresOf(times(every(10, 6), 7200)), 0, (watch) => watch);
    expect(facts.find(({ name }) => name.startsWith('10-minute periods'))).toMatchObject({
      figure: '0 of 12',
      standard: 'below about 1 %; one summary counts those with more than 5 (here 1 of 12)',
    });
  });
});
