import { describe, expect, it } from 'vitest';
import { cardTitle, catchingSentence, momentText, outcomeSentence } from '../../../client/card/cardWords.ts';
import { readCard } from '../../../client/card/readCard.ts';
import { card } from './fixtures.ts';

const setting = { unit: 'K', switchWord: 'reversal' };

describe('the words of a card', () => {
  it('name the switch by the watch’s word for it, its channel and its time', () => {
    expect(cardTitle(card(), setting)).toBe('Reversal of Loop A at 12:00:30.0');
  });

  it('say whether and when it was warned', () => {
    expect(outcomeSentence(card())).toBe('Warned 8 s before, at 12:00:22.0.');
    expect(outcomeSentence(card({ outcome: 'late', lead: 2.5, warnedAt: 1 }))).toBe(
      'Late: the warning came 2.5 s before, 4 s are needed.',
    );
    expect(outcomeSentence(card({ outcome: 'late', lead: null, warnedAt: null }))).toBe(
      'Late: the warning came less than 4 s before.',
    );
    expect(outcomeSentence(card({ outcome: 'missed', lead: null, warnedAt: null }))).toBe(
      'Missed: no warning between 10 s and 4 s before it.',
    );
    expect(outcomeSentence(card({ outcome: 'blind' }))).toMatch(/^Blind: the window was not full/);
    expect(outcomeSentence(card({ outcome: 'pending' }))).toBe('What became of it is not known yet.');
  });

  it('say what the threshold that would have caught it costs', () => {
    expect(catchingSentence(card(), setting)).toBe(
      'The strictest threshold that would have caught it is 1.9 sd (in use: 1.7 sd); in rehearsal that has 0.84 false warnings an hour, 61 of 100 warnings coming true.',
    );
    const same = card({ catching: { threshold: 1.7, falsePerHour: 0, cameTrue: null } });
    expect(catchingSentence(same, setting)).toBe(
      'No stricter threshold than the one in use, 1.7 sd, would have caught it; in rehearsal it has no false warnings an hour.',
    );
    expect(catchingSentence(card({ catching: null }), setting)).toMatch(/^No threshold that was tried/);
  });

  it('say that the cost is not known, and why, rather than that nothing would have caught it', () => {
    const made = card({ catching: null, notKnown: 'the model was fitted, not rehearsed' });
    expect(catchingSentence(made, setting)).toBe(
      'What another threshold would have cost is not known: the model was fitted, not rehearsed.',
    );
  });

  it('give a level in the channel’s unit', () => {
    const made = card({
      variable: 'level rising',
      threshold: 40,
      catching: { threshold: 38.5, falsePerHour: 12.3, cameTrue: 0.2 },
    });
    expect(catchingSentence(made, setting)).toContain('is 38.5 K (in use: 40 K)');
    expect(catchingSentence(made, setting)).toContain('12 false warnings an hour');
  });

  it('read a moment off as seen from the switch', () => {
    expect([-12.4, 0, 3, -0.02].map(momentText)).toEqual([
      '12 s before',
      'at the switch',
      '3 s after',
      '0.02 s before',
    ]);
  });
});

describe('a card out of JSON', () => {
  it('gets typed arrays back, with NaN where a value was missing', () => {
    const made = card();
    const sent = JSON.parse(
      JSON.stringify({ ...made, t: [1, 2], signal: [0.5, null], value: [null, 2] }),
    ) as Parameters<typeof readCard>[0];
    expect(readCard(sent)).toEqual({
      ...made,
      t: Float64Array.of(1, 2),
      signal: Float64Array.of(0.5, Number.NaN),
      value: Float64Array.of(Number.NaN, 2),
    });
  });
});
