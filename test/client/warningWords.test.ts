import { describe, expect, it } from 'vitest';
import {
  acknowledgedText,
  gradeSentence,
  headline,
  howToWatch,
  leftText,
  outcomeText,
  promiseText,
  settledText,
  thresholdText,
  unwarnedText,
} from '../../client/warningWords.ts';
import type { WarningOutcome } from '../../shared-types/warning.ts';
import { score, warning, watch } from './fixtures.ts';

const one = warning();

describe('an open warning', () => {
  it('says when, as seen from now, while its span is ahead', () => {
    expect(headline(one, watch(), one.at + 6)).toMatchObject({
      what: 'Reversal expected',
      when: 'in 4 – 14 s',
    });
  });

  it('says that it may happen at any moment once the span has begun', () => {
    const words = headline(one, watch(), one.from + 2.5);
    expect(words).toMatchObject({ what: 'Reversal may happen', when: 'at any moment' });
    expect(words.until).toMatch(/^until \d\d:\d\d:\d\d, 8 s more$/);
  });

  it('says that its outcome is not known once the span is over', () => {
    expect(headline(one, watch(), one.to + 1).until).toBe('what became of it is not known yet');
  });

  it('uses the watch’s own word for a switch', () => {
    expect(headline(one, watch({ switchWord: 'mode hop' }), one.at).what).toBe('Mode hop expected');
  });

  it('says what such warnings are worth, and nothing without a rehearsal', () => {
    expect(promiseText(watch())).toEqual({
      share: '97 of 100 such warnings came true',
      where: 'in rehearsal, repeats apart (95 % interval 92 to 99)',
    });
    expect(promiseText(watch({ promise: null }))).toBeNull();
  });

  it('says how much of the usual lead is left', () => {
    expect(leftText(one, watch(), one.at + 6)).toBe('of a usual lead of 16 s, 10 s are left for you');
    expect(leftText(one, watch(), one.at + 17)).toBe('the usual lead of 16 s is used up');
    expect(leftText(one, watch({ promise: null }), one.at + 6)).toBeNull();
  });
});

describe('no warning open', () => {
  it('says how many switches came unwarned in rehearsal', () => {
    expect(unwarnedText(watch())).toBe(
      'in rehearsal 1 of 154 reversals came unwarned, 12 warned of too late',
    );
  });

  it('leaves blind switches out of the count', () => {
    const promise = score({ switches: { total: 10, warned: 6, late: 0, missed: 2, blind: 2 } });
    expect(unwarnedText(watch({ promise }))).toBe('in rehearsal 2 of 8 reversals came unwarned');
  });
});

describe('what became of it', () => {
  it('has a word of its own for each outcome', () => {
    const outcomes: WarningOutcome[] = ['open', 'true', 'repeat', 'late', 'false', 'unseen', 'acted'];
    expect(new Set(outcomes.map((outcome) => outcomeText(warning({ outcome })))).size).toBe(outcomes.length);
  });

  it('gives the lead of one that came true and the span of one that is open', () => {
    expect(settledText(warning({ outcome: 'true', lead: 6.8 }), watch())).toBe('reversal after 6.8 s');
    expect(settledText(one, watch())).toMatch(/^for \d\d:\d\d:\d\d to \d\d:\d\d:\d\d$/);
  });

  it('says who acknowledged it, or that nobody was asked', () => {
    expect(acknowledgedText(one, watch())).toBe('unacknowledged');
    expect(acknowledgedText(warning({ acknowledgedAt: 5, acknowledgedBy: 'Ana' }), watch())).toBe(
      'acknowledged by Ana',
    );
    expect(acknowledgedText(one, watch({ trigger: true }))).toBe('nobody was asked');
    expect(acknowledgedText(warning({ quiet: true }), watch())).toBe('nobody was asked');
  });
});

describe('today’s grade', () => {
  it('is one sentence beside what rehearsal promised', () => {
    const grade = score({
      switches: { total: 331, warned: 268, late: 40, missed: 23, blind: 0 },
      warnings: { total: 300, true: 190, repeat: 100, late: 4, false: 6, open: 0, unseen: 0, acted: 0 },
      lead: { median: 15.4, p10: null, p90: null, random: null },
    });
    expect(gradeSentence(watch({ gradeAtDelivery: grade }), 'Loop A')).toBe(
      'Loop A warned 268 of 331 reversals, median lead 15 s; 190 of 200 warnings came true (rehearsal said 97 %), beside 100 repeats.',
    );
  });

  it('says so when there is nothing to grade yet', () => {
    expect(gradeSentence(watch(), 'Loop A')).toBe('Loop A has met no reversal and given no warning yet.');
  });
});

describe('the rest of the strip', () => {
  it('names a threshold in the variable’s own scale', () => {
    expect(thresholdText(1.7, 'forcing', 'K')).toBe('1.7 sd');
    expect(thresholdText(-41.25, 'level', 'K')).toBe('−41.3 K');
  });

  it('gives commands that a shell takes as they are, names with spaces in quotes', () => {
    expect(howToWatch('Loop A').watch).toBe('npx foreshift watch --model model.json --channel "Loop A"');
    expect(howToWatch('loop-a').fit).toMatch(/^npx foreshift fit stored:loop-a --channel loop-a --regime /);
  });
});
