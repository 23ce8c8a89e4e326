import { chooseDelays } from '../embedding/windowChoice.ts';
import { type BaselineScales, baselineFamilies, type Family } from './baselines.ts';
import type { Prepared } from './prepare.ts';
import { bestTuned, type Ground, mannersOn, type Tuned, thresholdsOf, triedOn, tune } from './tune.ts';

/** Manners in which a baseline is tuned, the usual one and what holds off for half as long, and thresholds of each. */
const MANNERS = 2;
const THRESHOLDS = 48;

/**
 * Tunes every baseline on the tuning part with the same ceiling as the variables: of each its best setting.
 *
 * @param runs runs[i][c] of the tuning part
 */
export function tuneBaselines(
  prepared: Prepared,
  ground: Ground,
  runs: readonly (readonly Float64Array[])[],
  progress: (share: number, doing: string) => void,
): Tuned[] {
  const families = baselineFamilies(scalesOf(prepared, runs));
  return families.flatMap((family, i) => {
    progress(i / families.length, `baseline: ${family[0]!.name}`);
    const best = bestOfFamily(ground, family);
    return best === null ? [] : [best];
  });
}

function bestOfFamily(ground: Ground, family: Family): Tuned | null {
  const tuned = family.flatMap((signal) => {
    const tried = triedOn(ground, signal);
    const manners = mannersOn(ground, tried, signal).slice(0, signal.thresholds === null ? MANNERS : 1);
    return tune(ground, tried, signal, manners, thresholdsOf(signal, tried, THRESHOLDS)).tuned;
  });
  return bestTuned(tuned, ground.ceiling);
}

function scalesOf(
  { tuning, interval, spans }: Prepared,
  runs: readonly (readonly Float64Array[])[],
): BaselineScales {
  const lines = runs.map((run) => run[0]!);
  const long = lines.filter(({ length }) => length > 8);
  const samples = lines.reduce((sum, { length }) => sum + length, 0);
  const switches = tuning.reduce((sum, one) => sum + one.switches.length, 0);
  let sum = 0;
  for (const line of lines) for (let i = 0; i < line.length; i++) sum += line[i]!;
  return {
    interval,
    scale: long.length === 0 ? 4 : chooseDelays(long).delays,
    horizon: spans.horizon,
    room: spans.horizon - spans.leastLead,
    between: samples / Math.max(1, switches),
    mean: sum / samples,
    most: Math.floor(Math.max(...lines.map(({ length }) => length)) / 8),
  };
}
