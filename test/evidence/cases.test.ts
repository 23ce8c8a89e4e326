/**
 * Rehearsals of simulated rigs. In the suite one seed of each; `npm run cases` runs all five, earlier warnings too, and
 * prints the table.
 *
 * On the Lorenz loop the skill share must be that of a forcing alone in an independent, cruder study to the same
 * definitions, less 0.05 for a mean over five seeds, less 0.1 for one. That study does not give the numbers of the other
 * rigs, so of those at least half of a perfect warner's skill is asked.
 */
import { describe, expect, it } from 'vitest';
import {
  CASES,
  type Case,
  type CaseRow,
  caseLines,
  EARLY_CASES,
  meanShare,
  rehearseCase,
  SEEDS,
} from './cases.ts';

const WHOLE = process.env.FORESHIFT_WHOLE !== undefined;
const SLACK = WHOLE ? 0.05 : 0.1;

const STUDY: Record<string, number> = {
  'Lorenz loop': 0.81,
  'Lorenz loop, rough': 0.71,
  'Lorenz loop, early': 0.73,
};
const leastShare = (name: string) => (name in STUDY ? STUDY[name]! - SLACK : 0.5);

const cases = (WHOLE ? [...CASES, ...EARLY_CASES] : CASES).map((given): [string, Case, CaseRow[]] => [
  given.name,
  given,
  (WHOLE ? SEEDS : SEEDS.slice(0, 1)).map((seed) => rehearseCase(given, seed)),
]);
console.log(`\n${cases.flatMap(([, given, rows]) => caseLines(given, rows)).join('\n')}`);

describe.each(cases)('%s', (name, _, rows) => {
  it('is warned of with the skill that must be reached', () => {
    expect(meanShare(rows)).toBeGreaterThanOrEqual(leastShare(name));
  });

  it('has enough switches to say so, and more skill than chance gives', () => {
    for (const { result } of rows) {
      expect(result.score.switches.total).toBeGreaterThanOrEqual(50);
      expect(result.score.pValue!).toBeLessThan(0.01);
      expect(['useful', 'no better than', 'weak']).toContain(result.verdict.kind);
    }
  });

  it('is not called useful where a plain baseline does better', () => {
    for (const { result } of rows) {
      const [chosen, ...others] = result.contenders;
      const better = others.some((one) => one.name !== 'forcing' && one.skill! > chosen!.skill!);
      if (better) expect(result.verdict.kind).toBe('no better than');
    }
  });
});
