/**
 * Verdicts on processes about whose switches nothing, or little, can be known. In the suite a few short recordings of
 * some; `npm run verdicts` counts them over 200 seeds of each, and prints how often each verdict was given.
 */
import { describe, expect, it } from 'vitest';
import type { RehearsalResult } from '../../shared-types/rehearsal.ts';
import { BLANKS, type Blank, rehearseBlank, verdictLines } from './verdicts.ts';

const WHOLE = process.env.FORESHIFT_WHOLE !== undefined;
const SEEDS = WHOLE ? 200 : 16;
/** of 200 that are useful one time in a hundred, more than 6 come once in 200 times; of 16, more than 1 in 100 */
const MOST_USEFUL = WHOLE ? 6 : 1;
/** the same for any skill at all, claimed below a p-value of a hundredth: more come less than once in 1900 times */
const MOST_SKILLED = WHOLE ? 8 : 2;
const blanks = WHOLE ? BLANKS : BLANKS.filter(({ inSuite }) => inSuite);

const counted = blanks.map((blank): [string, Blank, RehearsalResult[]] => {
  const samples = WHOLE ? blank.samples : blank.samples / 2;
  const results = Array.from({ length: SEEDS }, (_, i) => rehearseBlank(blank, `seed ${i}`, samples));
  console.log(verdictLines(blank, results).join('\n'));
  return [blank.name, blank, results];
});

describe.each(counted)('%s', (_, blank, results) => {
  it('is hardly ever called useful', () => {
    const useful = results.filter(({ verdict }) => verdict.kind === 'useful');
    expect(useful.length, useful.map(({ verdict }) => verdict.sentence).join('\n')).toBeLessThanOrEqual(
      MOST_USEFUL,
    );
  });

  it('has enough switches for the verdict to be about skill', () => {
    const judged = results.filter(({ verdict }) => verdict.kind !== 'too few events');
    expect(judged.length).toBeGreaterThan(0.9 * results.length);
  });

  if (blank.nothingToKnow) {
    it('is said to give no skill', () => {
      const skilled = results.filter(({ verdict }) => !['no skill', 'too few events'].includes(verdict.kind));
      expect(skilled.length).toBeLessThanOrEqual(MOST_SKILLED);
    });
  }
});
