import { addTally, emptyTally, type Steps, skillOf } from './tally.ts';

/** Circular shifts made for a p-value. */
export const SHIFTS = 1000;

/**
 * How often warnings as many and as spaced as these, but without knowledge, do as well: the warnings are shifted
 * against the switches by a random number of steps, around the end, over the watched steps of each stretch. The p-value
 * is (1 + shifts with at least the skill) / (1 + shifts).
 *
 * @param warnings of each stretch, ascending steps
 * @param uniform  seeded, in [0, 1)
 * @returns null where no switch counts
 */
export function shiftPValue(
  stretches: readonly Steps[],
  warnings: readonly Int32Array[],
  uniform: () => number,
  shifts = SHIFTS,
): number | null {
  const skill = skillOfWarnings(stretches, warnings);
  if (skill === null) return null;
  const circles = stretches.map((steps, i) => makeCircle(steps, warnings[i]!));
  let asGood = 0;
  for (let shift = 0; shift < shifts; shift++) {
    const tally = emptyTally();
    circles.forEach((circle, i) => {
      turn(circle, uniform());
      addTally(stretches[i]!, circle.shifted, circle.shifted.length, circle.cover, tally);
    });
    // rounding must not make a shift by nothing fall short of the original
    if ((skillOf(tally) ?? 0) >= skill - 1e-12) asGood++;
  }
  return (1 + asGood) / (1 + shifts);
}

function skillOfWarnings(stretches: readonly Steps[], warnings: readonly Int32Array[]): number | null {
  const tally = emptyTally();
  stretches.forEach((steps, i) => {
    const cover = new Int32Array(steps.switches.length);
    addTally(steps, warnings[i]!, warnings[i]!.length, cover, tally);
  });
  return skillOf(tally);
}

interface Circle {
  /** the watched steps of the part, ascending */
  watched: Int32Array;
  /** for each warning its place in `watched` */
  places: Int32Array;
  shifted: Int32Array;
  cover: Int32Array;
}

/** The circle begins a horizon before the scored steps: earlier warnings cannot cover a scored switch. */
function makeCircle(steps: Steps, warnings: Int32Array): Circle {
  const { scoredFrom, horizon, count, watchedBefore } = steps;
  const begin = Math.max(0, scoredFrom - horizon);
  const watched: number[] = [];
  for (let i = begin; i < count; i++) if (watchedBefore[i + 1]! > watchedBefore[i]!) watched.push(i);
  const before = watchedBefore[Math.min(begin, count)]!;
  const places = warnings
    .filter((a) => a >= begin && a < count && watched.length > 0)
    .map((a) => Math.min(watched.length - 1, watchedBefore[a]! - before));
  return {
    watched: Int32Array.from(watched),
    places,
    shifted: new Int32Array(places.length),
    cover: new Int32Array(steps.switches.length),
  };
}

/** Moves every warning on by the same share of the circle; those that come round come first. */
function turn({ watched, places, shifted }: Circle, share: number): void {
  const size = watched.length;
  const by = Math.floor(share * size);
  let first = 0;
  while (first < places.length && places[first]! + by < size) first++;
  const round = places.length - first;
  for (let i = first; i < places.length; i++) shifted[i - first] = watched[places[i]! + by - size]!;
  for (let i = 0; i < first; i++) shifted[round + i] = watched[places[i]! + by]!;
}

/**
 * The median lead, in steps, of a warner that knows nothing and issues as many warnings, spread evenly at random over
 * the watched steps: with p = warnings / watched the chance of a warning in a step, the first warning that covers a
 * switch has lead H + 1 − k with probability p(1 − p)^(k−1) / (1 − (1 − p)^(H−M)), k = 1 … H − M. In closed form,
 * nothing is simulated.
 *
 * @returns null without warnings or watched steps
 */
export function randomMedianLead(
  warnings: number,
  watched: number,
  leastLead: number,
  horizon: number,
): number | null {
  if (warnings <= 0 || watched <= 0) return null;
  const quiet = 1 - Math.min(1, warnings / watched);
  const places = horizon - leastLead;
  const half = (1 - quiet ** places) / 2;
  let k = 1;
  while (k < places && 1 - quiet ** k < half) k++;
  return horizon + 1 - k;
}
