/**
 * A stretch of a recording in whole grid steps, as the scoring wants it. With M the least lead and H the horizon, a
 * warning at step a covers a switch at step e if M < e − a ≤ H.
 */
export interface Steps {
  leastLead: number;
  horizon: number;
  /** steps 0 … count − 1 */
  count: number;
  /** the last step up to which every switch is known, ≤ count − 1 */
  known: number;
  /** switches and warnings from this step on are counted; those before it still cover and repeat */
  scoredFrom: number;
  /** length count + 1: how many of the steps before each had a full window */
  watchedBefore: Int32Array;
  /** onsets, ascending, each in 0 … count − 1 */
  switches: Int32Array;
  /** where the regime channel could not be seen: from, to of each, in (fractional) steps, ascending */
  unseen: Float64Array;
}

/** What became of the warnings and switches of a stretch, counted. */
export interface Tally {
  switches: { warned: number; late: number; missed: number; blind: number };
  warnings: { true: number; repeat: number; late: number; false: number; open: number; unseen: number };
  /** watched steps, and those of them inside the union of the spans (a + M, a + H] */
  watched: number;
  spanned: number;
}

/** A tally in which nothing has been counted. */
export function emptyTally(): Tally {
  return {
    switches: { warned: 0, late: 0, missed: 0, blind: 0 },
    warnings: { true: 0, repeat: 0, late: 0, false: 0, open: 0, unseen: 0 },
    watched: 0,
    spanned: 0,
  };
}

/** Adds `sign` times another tally to `tally`. */
export function mergeTally(tally: Tally, other: Tally, sign: 1 | -1 = 1): void {
  for (const key of Object.keys(tally.switches) as (keyof Tally['switches'])[])
    tally.switches[key] += sign * other.switches[key];
  for (const key of Object.keys(tally.warnings) as (keyof Tally['warnings'])[])
    tally.warnings[key] += sign * other.warnings[key];
  tally.watched += sign * other.watched;
  tally.spanned += sign * other.spanned;
}

/** Warnings counted, whatever became of them. */
export const warningsOf = ({ warnings }: Tally): number =>
  warnings.true + warnings.repeat + warnings.late + warnings.false + warnings.open + warnings.unseen;

/**
 * Counts outcomes, adding to `tally`: one pass over switches and warnings, whatever the length of the recording.
 *
 * @param warnings ascending steps; the first `size` entries count
 * @param cover    scratch, at least as long as steps.switches: index of the first warning that covers each, −1: none
 */
export function addTally(
  steps: Steps,
  warnings: Int32Array,
  size: number,
  cover: Int32Array,
  tally: Tally,
): void {
  tallySwitches(steps, warnings, size, cover, tally);
  tallyWarnings(steps, warnings, size, cover, tally);
  tally.watched += watchedWithin(steps, steps.scoredFrom, steps.count);
  tally.spanned += spannedSteps(steps, warnings, size);
}

/** Whether no step in [e − H, e − M) had a full window. */
export function isBlind(steps: Steps, e: number): boolean {
  return watchedWithin(steps, e - steps.horizon, e - steps.leastLead) === 0;
}

/** Watched steps in [from, to). */
export function watchedWithin({ count, watchedBefore }: Steps, from: number, to: number): number {
  const low = Math.min(count, Math.max(0, from));
  const high = Math.min(count, Math.max(low, to));
  return watchedBefore[high]! - watchedBefore[low]!;
}

function tallySwitches(
  steps: Steps,
  warnings: Int32Array,
  size: number,
  cover: Int32Array,
  { switches: found }: Tally,
): void {
  const { switches, leastLead, horizon, scoredFrom } = steps;
  let first = 0;
  let near = 0;
  for (let i = 0; i < switches.length; i++) {
    const e = switches[i]!;
    while (first < size && warnings[first]! < e - horizon) first++;
    while (near < size && warnings[near]! < e - leastLead) near++;
    cover[i] = first < near ? first : -1;
    if (e < scoredFrom) continue;
    if (isBlind(steps, e)) found.blind++;
    else if (first < near) found.warned++;
    else if (near < size && warnings[near]! <= e) found.late++;
    else found.missed++;
  }
}

function tallyWarnings(
  steps: Steps,
  warnings: Int32Array,
  size: number,
  cover: Int32Array,
  { warnings: found }: Tally,
): void {
  const { switches, leastLead, horizon, scoredFrom, known } = steps;
  let next = 0;
  for (let w = 0; w < size; w++) {
    const a = warnings[w]!;
    while (next < switches.length && switches[next]! < a) next++;
    if (a < scoredFrom) continue;
    let first = false;
    let warned = false;
    let late = false;
    for (let i = next; i < switches.length && switches[i]! <= a + horizon; i++) {
      if (cover[i] === w) first = true;
      else if (cover[i] !== -1) warned = true;
      else if (switches[i]! - a <= leastLead) late = true;
    }
    if (first) found.true++;
    else if (late) found.late++;
    else if (warned) found.repeat++;
    else if (meetsUnseen(steps, a + leastLead, a + horizon)) found.unseen++;
    else if (known < a + horizon) found.open++;
    else found.false++;
  }
}

function meetsUnseen({ unseen }: Steps, from: number, to: number): boolean {
  for (let i = 0; i < unseen.length; i += 2) if (unseen[i]! < to && unseen[i + 1]! > from) return true;
  return false;
}

/** Watched steps from `scoredFrom` on that lie inside the union of the spans. */
export function spannedSteps(steps: Steps, warnings: Int32Array, size: number): number {
  return spannedWithin(steps, warnings, size, steps.scoredFrom, steps.count);
}

/** Watched steps in [first, end) that lie inside the union of the spans. */
export function spannedWithin(
  steps: Steps,
  warnings: Int32Array,
  size: number,
  first: number,
  end: number,
): number {
  const { leastLead, horizon } = steps;
  let spanned = 0;
  let reached = first;
  for (let w = firstReaching(warnings, size, first - horizon); w < size; w++) {
    const from = Math.max(reached, warnings[w]! + leastLead + 1);
    if (from >= end) break;
    const to = Math.min(end, warnings[w]! + horizon + 1);
    if (to <= from) continue;
    spanned += watchedWithin(steps, from, to);
    reached = to;
  }
  return spanned;
}

/** Index of the first of ascending warnings that is at `step` or later. */
function firstReaching(warnings: Int32Array, size: number, step: number): number {
  let [low, high] = [0, size];
  while (low < high) {
    const middle = (low + high) >> 1;
    if (warnings[middle]! < step) low = middle + 1;
    else high = middle;
  }
  return low;
}

/** detection = warned / (warned + late + missed); null where no switch counts. */
export function detectionOf({ switches: { warned, late, missed } }: Tally): number | null {
  const total = warned + late + missed;
  return total === 0 ? null : warned / total;
}

/** τ: the share of watched steps inside the spans; 0 where nothing was watched. */
export function tauOf({ spanned, watched }: Tally): number {
  return watched === 0 ? 0 : spanned / watched;
}

/**
 * skill = detection − τ: the height above the diagonal of the error diagram; null where no switch counts.
 *
 * @see Molchan 1991, Tectonophysics 193, p. 267
 */
export function skillOf(tally: Tally): number | null {
  const detection = detectionOf(tally);
  return detection === null ? null : detection - tauOf(tally);
}

/** came true = true / (true + late + false); null where no warning counts. */
export function cameTrueOf({ warnings }: Tally): number | null {
  const total = warnings.true + warnings.late + warnings.false;
  return total === 0 ? null : warnings.true / total;
}
