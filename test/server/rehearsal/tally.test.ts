import fc from 'fast-check';
import { expect, it } from 'vitest';
import { type Steps, spannedSteps, spannedWithin } from '../../../server/rehearsal/tally.ts';

it('counts the watched steps in spans piece by piece as it does whole, and as one counts them by hand', () => {
  fc.assert(
    fc.property(
      fc.array(fc.boolean(), { minLength: 1, maxLength: 60 }),
      fc.uniqueArray(fc.nat(59), { maxLength: 12 }),
      fc.array(fc.nat(60), { maxLength: 5 }),
      fc.nat(5),
      fc.integer({ min: 1, max: 12 }),
      (watched, issued, cuts, leastLead, room) => {
        const count = watched.length;
        const watchedBefore = new Int32Array(count + 1);
        watched.forEach((seen, i) => {
          watchedBefore[i + 1] = watchedBefore[i]! + Number(seen);
        });
        const warnings = Int32Array.from(issued.filter((a) => a < count)).sort();
        const horizon = leastLead + room;
        const steps = { leastLead, horizon, count, scoredFrom: 0, watchedBefore } as Steps;
        const inside = (step: number) => warnings.some((a) => a + leastLead < step && step <= a + horizon);
        const byHand = watched.filter((seen, step) => seen && inside(step)).length;
        expect(spannedSteps(steps, warnings, warnings.length)).toBe(byHand);
        const ends = [0, ...cuts.map((cut) => Math.min(cut, count)).sort((a, b) => a - b), count];
        const pieces = ends
          .slice(1)
          .map((end, i) => spannedWithin(steps, warnings, warnings.length, ends[i]!, end));
        expect(pieces.reduce((sum, one) => sum + one, 0)).toBe(byHand);
      },
    ),
    { seed: 41, numRuns: 400 },
  );
});
