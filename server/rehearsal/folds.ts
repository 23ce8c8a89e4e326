import type { GriddedRecording } from './gridded.ts';
import { emptyTally, mergeTally } from './tally.ts';
import { type Ceiling, choosePoint, type OperatingPoint, pointOf } from './threshold.ts';

/** Folds of the tuning part. */
const FOLDS = 4;

/**
 * Where folds begin: in time order, each a quarter of every recording; with at least four recordings whole recordings.
 *
 * @param recordings of the tuning part
 * @returns for each recording the first step of each fold and the step after the last one
 */
export function foldStarts(recordings: readonly GriddedRecording[]): number[][] {
  const whole = recordings.length >= FOLDS;
  return recordings.map(({ start, end, interval }, index) => {
    const count = Math.round((end - start) / interval) + 1;
    const own = Math.floor((index * FOLDS) / recordings.length);
    return Array.from({ length: FOLDS + 1 }, (_, k) => {
      if (whole) return k <= own ? 0 : count;
      return Math.round((k * count) / FOLDS);
    });
  });
}

/**
 * What choosing the threshold of a setting is worth: in each fold the threshold that was chosen on the other folds is
 * counted, so that no setting gains by having had many thresholds to choose from. Folds are blocks in time order, and
 * the state of the rule runs through them; a span that reaches over a border is counted where it is, which at worst
 * mixes one horizon into the next fold.
 *
 * @param points of one setting, one a threshold, with their folds
 * @returns null where no fold has a switch that counts
 * @see Stone 1974, Journal of the Royal Statistical Society B 36, 111 (choosing by cross-validation)
 * @see Varma, Simon 2006, BMC Bioinformatics 7, 91 (why the choice must lie inside it)
 * @see Bergmeir, Benítez 2012, Information Sciences 191, 192 (blocks in time order)
 */
export function heldOutPoint(
  points: readonly OperatingPoint[],
  ceiling: Ceiling | null,
  interval: number,
): OperatingPoint | null {
  const first = points[0];
  if (first === undefined) return null;
  const pooled = emptyTally();
  for (let k = 0; k < first.folds.length; k++) {
    const others = points.map((point) => {
      const tally = emptyTally();
      mergeTally(tally, point.tally);
      mergeTally(tally, point.folds[k]!, -1);
      return pointOf(point.rule, tally, [point.folds[k]!], interval);
    });
    const chosen = choosePoint(
      others.filter((point) => point !== null),
      ceiling,
    );
    // with no switch elsewhere to choose by, nothing is said in this fold
    if (chosen !== null) mergeTally(pooled, chosen.point.folds[0]!);
    else mergeTally(pooled, silenced(points[0]!.folds[k]!));
  }
  return pointOf(first.rule, pooled, [], interval);
}

/** What a warner that says nothing would have been counted for in the same fold. */
function silenced(fold: OperatingPoint['tally']): OperatingPoint['tally'] {
  const tally = emptyTally();
  const { warned, late, missed, blind } = fold.switches;
  tally.switches.missed = warned + late + missed;
  tally.switches.blind = blind;
  tally.watched = fold.watched;
  return tally;
}
