import type { Ceiling } from '../../shared-types/rehearsal.ts';
import { skillDifference } from './difference.ts';
import type { Verdictable } from './judge.ts';

/** The baseline that a chosen variable has to beat, and our skill less its with a 95 % interval. */
export interface Rival {
  judged: Verdictable;
  difference: { skill: number; value: number; low: number; high: number };
}

/**
 * The baseline with the highest skill on the judged part. Each was chosen in the order in which the variable was (within
 * the ceiling; else with half of its warnings coming true; else the plain maximum of skill), and all of them count: one
 * that has more skill with fewer warnings coming true still knows more. Only where a person set a ceiling do those that
 * kept within it on the tuning part come first, because the others may not be used; where none did, all count again.
 *
 * @param uniform seeded, in [0, 1)
 * @returns null where nothing could be judged
 */
export function rivalOf(
  ours: Verdictable,
  baselines: readonly Verdictable[],
  ceiling: Ceiling,
  uniform: () => number,
): Rival | null {
  const best = highest(fairTo(ours, baselines, ceiling));
  if (best === null || ours.point === null) return null;
  const difference = skillDifference(ours.blocks, best.blocks, uniform);
  return { judged: best, difference: { skill: best.point!.skill, ...difference } };
}

/** The baseline with the highest skill of those that a ceiling leaves out; null where it has no more than ours. */
export function leftOutByCeiling(
  ours: Verdictable,
  baselines: readonly Verdictable[],
  ceiling: Ceiling,
): Verdictable | null {
  const fair = fairTo(ours, baselines, ceiling);
  const best = highest(baselines.filter((one) => one.point !== null && !fair.includes(one)));
  return best === null || ours.point === null || best.point!.skill <= ours.point.skill ? null : best;
}

function fairTo(ours: Verdictable, baselines: readonly Verdictable[], ceiling: Ceiling): Verdictable[] {
  const judged = baselines.filter(({ point }) => point !== null);
  if ((ceiling.falsePerHour === null && ceiling.cameTrue === null) || ours.tuned.weak) return judged;
  const within = judged.filter(({ tuned }) => !tuned.weak);
  return within.length > 0 ? within : judged;
}

/** The one with the highest skill on the judged part; null where none could be judged. */
export function highest(judged: readonly Verdictable[]): Verdictable | null {
  return judged.reduce<Verdictable | null>((found, one) => {
    if (one.point === null) return found;
    return found === null || one.point.skill > found.point!.skill ? one : found;
  }, null);
}
