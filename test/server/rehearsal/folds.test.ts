import { describe, expect, it } from 'vitest';
import { foldStarts, heldOutPoint } from '../../../server/rehearsal/folds.ts';
import type { GriddedRecording } from '../../../server/rehearsal/gridded.ts';
import { emptyTally, type Tally } from '../../../server/rehearsal/tally.ts';
import { createTried, pointOf, tryWarner, warnerOf } from '../../../server/rehearsal/threshold.ts';
import { withSummary } from '../../../server/rehearsal/trace.ts';
import { createRandom } from '../../../server/signal/random.ts';
import { steppedRule, watchRuleWithDefaults } from '../../../server/watch/watchRule.ts';

const ruleAt = (threshold: number) =>
  watchRuleWithDefaults({ variable: 'forcing', direction: 'rising', threshold, leastLead: 2, horizon: 6 });

const recording = (steps: number): GriddedRecording => ({
  interval: 0.5,
  start: 10,
  end: 10 + (steps - 1) * 0.5,
  known: 10 + (steps - 1) * 0.5,
  runs: [],
  switches: [],
  unseen: [],
});

/** A fold of 10 switches, 100 watched steps: so many warned and so many steps in spans. */
function fold(warned: number, spanned: number): Tally {
  const tally = emptyTally();
  tally.switches.warned = warned;
  tally.switches.missed = 10 - warned;
  tally.warnings.true = warned;
  tally.watched = 100;
  tally.spanned = spanned;
  return tally;
}

function pointOfFolds(threshold: number, folds: Tally[]) {
  const tally = emptyTally();
  for (const one of folds) {
    tally.switches.warned += one.switches.warned;
    tally.switches.missed += one.switches.missed;
    tally.warnings.true += one.warnings.true;
    tally.watched += one.watched;
    tally.spanned += one.spanned;
  }
  return pointOf(ruleAt(threshold), tally, folds, 1)!;
}

describe('folds', () => {
  it('are quarters of every recording in time order', () => {
    expect(foldStarts([recording(100), recording(10)])).toEqual([
      [0, 25, 50, 75, 100],
      [0, 3, 5, 8, 10],
    ]);
  });

  it('are whole recordings when there are four or more', () => {
    const starts = foldStarts([recording(5), recording(6), recording(7), recording(8), recording(9)]);
    expect(starts).toEqual([
      [0, 5, 5, 5, 5],
      [0, 6, 6, 6, 6],
      [0, 0, 7, 7, 7],
      [0, 0, 0, 8, 8],
      [0, 0, 0, 0, 9],
    ]);
  });

  it('add up to the whole, whatever the warnings do at their borders', () => {
    const { uniform } = createRandom('folds');
    for (let round = 0; round < 50; round++) {
      const count = 400;
      const steps = Float64Array.from({ length: count }, (_, i) => i);
      const trace = withSummary(
        steps.map(() => uniform()),
        { time: steps, at: steps, stamp: Int32Array.from(steps) },
      );
      const switches = Int32Array.from({ length: 20 }, () => Math.floor(count * uniform())).sort();
      const of = {
        leastLead: 2,
        horizon: 6,
        count,
        known: count - 1,
        scoredFrom: 0,
        watchedBefore: Int32Array.from({ length: count + 1 }, (_, i) => i),
        switches,
        unseen: Float64Array.of(),
      };
      const rule = ruleAt(0.9);
      const warner = warnerOf(steppedRule(rule, 1));
      const whole = tryWarner([createTried(trace, of)], warner, rule, 1)!;
      const folded = tryWarner([createTried(trace, of, [0, 100, 200, 300, count])], warner, rule, 1)!;
      expect({ ...folded, folds: [] }).toEqual(whole);
      expect(folded.folds).toHaveLength(4);
    }
  });
});

describe('what choosing a threshold is worth', () => {
  it('is what it is worth in every fold when one threshold is best everywhere', () => {
    const good = pointOfFolds(1, [fold(8, 20), fold(8, 20), fold(8, 20), fold(8, 20)]);
    const bad = pointOfFolds(2, [fold(5, 20), fold(5, 20), fold(5, 20), fold(5, 20)]);
    expect(heldOutPoint([bad, good], null, 1)!.skill).toBeCloseTo(0.6, 12);
  });

  it('is not what luck in one fold would give', () => {
    // each threshold shines in one fold only: chosen by the others, none is used where it shines
    const shining = [0, 1, 2, 3].map((lucky) =>
      pointOfFolds(
        lucky,
        [0, 1, 2, 3].map((k) => (k === lucky ? fold(10, 10) : fold(2, 20))),
      ),
    );
    expect(Math.max(...shining.map(({ skill }) => skill))).toBeGreaterThan(0.2);
    expect(heldOutPoint(shining, null, 1)!.skill).toBeCloseTo(0, 12);
  });

  it('counts a fold as missed when no switch elsewhere could have been chosen by', () => {
    const silent = emptyTally();
    silent.watched = 100;
    const only = pointOfFolds(1, [fold(8, 20), silent, silent, silent]);
    const found = heldOutPoint([only], null, 1)!;
    expect([found.detection, found.skill]).toEqual([0, 0]);
  });
});
