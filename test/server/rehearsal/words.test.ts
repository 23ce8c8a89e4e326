import { describe, expect, it } from 'vitest';
import {
  allOf,
  counted,
  falseRateWords,
  percent,
  rateUnitOf,
  scoreSentence,
  spanWords,
  whereWords,
} from '../../../server/rehearsal/words.ts';
import type { Score } from '../../../shared-types/score.ts';

const DAY = 86_400;
const YEAR = 365.25 * DAY;

describe('the words of a rehearsal', () => {
  it.each([
    [0, '0 s'],
    [3e-8, '30 ns'],
    [2.5e-5, '25 µs'],
    [0.02, '20 ms'],
    [0.71, '0.71 s'],
    [45.23, '45.2 s'],
    [-2, '-2 s'],
    [1776, '29.6 min'],
    [11_520, '3.2 h'],
    [12 * DAY, '12 days'],
    [39_400_000, '456 days'],
    [36 * 2_629_800, '3 years'],
  ])('give a span of %f s as %s', (seconds, words) => {
    expect(spanWords(seconds)).toBe(words);
  });

  it('count rates by the second, minute, hour, day or year, as long as was watched', () => {
    const watched = [5, 300, 7200, 40 * DAY, 200 * YEAR];
    expect(watched.map((seconds) => rateUnitOf(seconds).words)).toEqual([
      'a second',
      'a minute',
      'an hour',
      'a day',
      'a year',
    ]);
    expect(falseRateWords(0.8, 7200)).toBe('0.8 false warnings an hour');
    expect(falseRateWords(1 / 24, 40 * DAY)).toBe('1 false warning a day');
    expect(falseRateWords(2.85e-6, 117 * YEAR)).toBe('0.025 false warnings a year');
  });

  it('know one from several', () => {
    expect([0, 1, 2].map((count) => counted(count, 'switch'))).toEqual([
      '0 switches',
      '1 switch',
      '2 switches',
    ]);
    expect([1, 2, 12].map((count) => allOf(count, 'dip'))).toEqual([
      'the only dip',
      'both dips',
      'all 12 dips',
    ]);
  });

  it('do not round a share to nothing or to all', () => {
    expect([null, 0, 0.004, 0.5, 0.996, 1].map(percent)).toEqual([
      '–',
      '0 %',
      '0.4 %',
      '50 %',
      '99.6 %',
      '100 %',
    ]);
  });

  it('say where a rule warns, a span as a span', () => {
    expect(whereWords({ direction: 'rising', threshold: 1.234 }, 'sd')).toBe('above 1.23 sd');
    expect(whereWords({ direction: 'falling', threshold: 13_400 }, '')).toBe('below 13400');
    expect(whereWords({ direction: 'rising', threshold: 3.2 * YEAR }, 'span')).toBe('above 3.2 years');
  });

  it('sum up a slow recording without a long row of digits', () => {
    const some = { value: 0.5, low: 0.25, high: 0.75 };
    const score: Score = {
      switches: { total: 1, warned: 1, late: 0, missed: 0, blind: 0 },
      warnings: { total: 1, true: 1, repeat: 0, late: 0, false: 0, open: 0, unseen: 0, acted: 0 },
      detection: some,
      cameTrue: some,
      falseRatio: some,
      falsePerHour: { value: 2.85e-6, low: 0, high: 1 },
      lead: { median: 39_400_000, p10: null, p90: null, random: null },
      tau: 0.1,
      skill: 0.5,
      skillShare: null,
      pValue: 0.01,
      watchedSeconds: 117 * YEAR,
    };
    expect(scoreSentence('The level above 60', score, 'excursion')).toBe(
      'The level above 60 warned 1 of 1 excursion, 95 % interval 25 to 75 %, median lead 456 days, 0.025 false warnings a year',
    );
  });
});
