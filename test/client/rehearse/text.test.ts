import { describe, expect, it } from 'vitest';
import {
  figuresOf,
  previewText,
  recordingText,
  requestText,
  rowSentence,
  short,
  verdictWords,
  whereText,
} from '../../../client/rehearse/text.ts';
import { momentField, momentOf } from '../../../client/rehearse/timeText.ts';
import { RehearsalRequest } from '../../../shared-types/rehearsal.ts';
import { score } from '../fixtures.ts';

const DAY = 1_700_006_400; // 2023-11-15T00:00:00Z
const falsePerHour = { value: 0.8, low: 0.31, high: 1.94 };

describe('the words of a rehearsal', () => {
  it('name a recording by its range, its length and its samples', () => {
    const one = {
      name: 'Loop A/1',
      channel: 'Loop A',
      from: DAY + 40_800,
      to: DAY + 44_880,
      samples: 10_200,
    };
    expect(recordingText(one, DAY)).toBe('11:20 to 12:28, 1 h 08 min, 10\u202f200 samples');
    expect(recordingText(one, DAY + 86_400 * 2)).toMatch(/^15 November 11:20 to 12:28/);
    expect(recordingText({ ...one, from: 0, to: 30 }, DAY)).toMatch(
      /^0:00:00 elapsed to 0:00:30 elapsed, 30 s/,
    );
  });

  it('say what a rule finds over all recordings', () => {
    const found = (count: number, shares: number[]) => ({
      switches: Array.from({ length: count }, () => ({ at: 0, from: 0, to: 1 })),
      perHour: 0,
      shares,
    });
    expect(previewText([found(10, [0.5, 0.5]), found(5, [0.3, 0.7])], 0.5, 'reversal')).toBe(
      '15 reversals, 30 an hour; of the time 40 % on the low side, 60 % on the high side.',
    );
    expect(previewText([found(1, [0.9, 0.1])], 2, 'dip')).toBe(
      '1 dip, 0.5 an hour; of the time 90 % quiet, 10 % in dips.',
    );
    expect(previewText([found(0, [1, 0])], 2, 'reversal')).toMatch(/^No reversal with this rule/);
  });

  it('say what a threshold does', () => {
    const row = { threshold: 1.7, score: score({ falsePerHour }) };
    expect(rowSentence({ variable: 'forcing', direction: 'rising' }, row, 'reversal', 'K')).toMatch(
      /^Forcing above 1.7 sd: 141 of 154 reversals warned, 0.8 false warnings an hour, median lead/,
    );
    expect(whereText({ variable: 'level', direction: 'falling' }, -2.14, 'K')).toBe('level below −2.14 K');
  });

  it('list the figures with how sure they are', () => {
    const figures = figuresOf(score({ falsePerHour }), 'reversal');
    expect(figures[0]).toEqual({
      name: 'Reversals warned',
      value: '141 of 154',
      sure: '95 % interval 86 to 95 %',
    });
    expect(figures.find(({ name }) => name === 'False warnings an hour')!.sure).toBe(
      '95 % interval 0.31 to 1.94',
    );
    expect(figures.find(({ name }) => name === 'Warnings that came true')!.value).toBe('141 of 150');
  });

  it('give every verdict a sign of its own beside its words', () => {
    const kinds = ['too few events', 'no skill', 'no better than', 'weak', 'useful'] as const;
    expect(new Set(kinds.map((kind) => verdictWords(kind, null).sign)).size).toBe(5);
    expect(verdictWords('no better than', 'level rising').words).toBe('No better than level rising');
  });

  it('say in one line what was asked', () => {
    const request = RehearsalRequest.parse({
      recordings: ['stored:Loop A/1'],
      channels: ['Loop A'],
      regime: 'sides:-0.8,0.8',
      leastLead: 10,
      horizon: 20,
      ceiling: { falsePerHour: 1 },
    });
    expect(requestText(request)).toBe(
      'Loop A · Loop A/1 · sides:-0.8,0.8 · least lead 10 s · horizon 20 s · at most 1 false warning an hour',
    );
  });

  it('write numbers with about three figures and a true minus sign', () => {
    expect([0, 0.123456, -1.5, 12.345, 1234.4, 0.00001].map(short)).toEqual([
      '0',
      '0.123',
      '−1.5',
      '12.3',
      '1234',
      '0.00001',
    ]);
  });
});

describe('a moment as it is typed', () => {
  const from = DAY + 80_000;
  const to = DAY + 90_000;

  it('is a time of day within the recording, on the day after where midnight lies between', () => {
    expect(momentOf('22:30', from, to)).toBe(DAY + 81_000);
    expect(momentOf('0:30:00.5', from, to)).toBe(DAY + 86_400 + 1800.5);
    expect(momentOf('25:00', from, to)).toBeNull();
  });

  it('is seconds or hours where time is elapsed', () => {
    expect(momentOf('125.5', 0, 600)).toBe(125.5);
    expect(momentOf('1:02:03', 0, 6000)).toBe(3723);
    expect(momentOf('125.5', from, to)).toBeNull();
  });

  it('is RFC 3339, in UTC unless it says otherwise', () => {
    expect(momentOf('2023-11-15T22:30:00Z', from, to)).toBe(DAY + 81_000);
    expect(momentOf('2023-11-15 22:30:00', from, to)).toBe(DAY + 81_000);
    expect(momentOf('2023-11-15T23:30:00+01:00', from, to)).toBe(DAY + 81_000);
    expect(momentOf('soon', from, to)).toBeNull();
  });

  it('comes back from the field it was written into', () => {
    for (const time of [from, from + 1234.5, to, from - 40 * 86_400, 0.1 + to])
      expect(momentOf(momentField(time, from, to), from, to)).toBeCloseTo(time, 1);
    expect(momentOf(momentField(83.2, 0, 600), 0, 600)).toBeCloseTo(83.2, 1);
  });
});
