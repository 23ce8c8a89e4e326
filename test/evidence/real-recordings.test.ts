/**
 * Rehearsals of real recordings, and what is honestly found in them. How many cycles the Sun went through is known
 * independently: from 1749 to 1983 its numbered cycles 1 to 21 became active, about every 11 years.
 */
import { describe, expect, it } from 'vitest';
import { MONTH, REAL_CASES, realLines, rehearseReal } from './real-recordings.ts';

const found = REAL_CASES.map((given) => rehearseReal(given));
console.log(`\n${REAL_CASES.flatMap((given, i) => realLines(given, found[i]!)).join('\n')}`);
const [steam, motes, outdoors, active, turning] = found;

const resultOf = (one: (typeof found)[number] | undefined) => {
  if (one === undefined || 'refused' in one) throw new Error(`refused: ${one?.refused}`);
  return one.result;
};

describe('the labelled readings of a small sensor network', () => {
  it('are refused where their one event is not in the part to choose by', () => {
    expect(steam).toEqual({
      refused: expect.stringMatching(/lies? in the tuning part.*give longer recordings$/),
    });
  });

  it('are refused where their one event is not in the part to judge', () => {
    expect(outdoors).toEqual({
      refused: expect.stringMatching(/none is left to judge.*give longer recordings$/),
    });
  });

  it('have too few events where one recording with the event is judged, and it is said how much more is needed', () => {
    const { verdict, score } = resultOf(motes);
    expect(score.switches.total).toBe(1);
    expect(verdict.kind).toBe('too few events');
    expect(verdict.sentence).toMatch(/^Too few events: 1 .* at least 10 .* more of recording/);
  });
});

describe('the monthly sunspot numbers, 1749 to 1983', () => {
  it('show the 21 numbered cycles becoming active, every 11 years', () => {
    const onsets = resultOf(active).switches.map(({ at }) => 1749 + at / (12 * MONTH));
    // the cycle before the first one is in its active phase in 1749
    const numbered = onsets.filter((year) => year > 1755);
    expect(numbered).toHaveLength(21);
    expect((numbered.at(-1)! - numbered[0]!) / 20).toBeGreaterThan(10.5);
    expect((numbered.at(-1)! - numbered[0]!) / 20).toBeLessThan(11.5);
  });

  it('have more skill than chance before a cycle becomes active, but no more than plain baselines', () => {
    const { verdict, score } = resultOf(active);
    expect(score.switches.total).toBeGreaterThanOrEqual(10);
    expect(score.pValue!).toBeLessThan(0.01);
    expect(verdict.kind).toBe('no better than');
  });

  it('are judged on about twice as many switches when the way back counts too, and are not called useful', () => {
    const { verdict, score } = resultOf(turning);
    const once = resultOf(active).score.switches.total;
    expect(Math.abs(score.switches.total - 2 * once)).toBeLessThanOrEqual(3);
    expect(verdict.kind).not.toBe('useful');
  });
});
