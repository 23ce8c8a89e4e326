import type { RehearsalRequest } from '../../shared-types/rehearsal.ts';
import { chooseDelays } from '../embedding/windowChoice.ts';
import { InputError } from '../signal/inputError.ts';
import { spanWords } from './words.ts';

/** Windows on the ladder; delays of all channels together in the longest one chosen by itself. */
const WINDOWS = 12;
const MOST_ROWS = 256;
const FEWEST_DELAYS = 4;
const RANKS = [2, 3, 4, 5];

/**
 * Delays to try: as asked for in seconds, or a ladder of equal ratios from half the signal's own time scale (the first
 * minimum of its average mutual information) to the horizon or twice that scale, whichever is longer.
 *
 * @param runs     runs[i][c]: the tuning part
 * @param horizon  steps
 * @throws InputError NO_FULL_WINDOW when no run is long enough for any of them
 */
export function delaysToTry(
  runs: readonly (readonly Float64Array[])[],
  { windows }: Pick<RehearsalRequest, 'windows'>,
  horizon: number,
  interval: number,
): number[] {
  const longest = Math.max(0, ...runs.map((run) => run[0]!.length));
  const wanted =
    windows === null ? ladder(runs, horizon) : windows.map((window) => Math.round(window / interval));
  const fitting = wanted.filter((delays) => delays >= 2 && 4 * delays <= longest);
  if (fitting.length === 0) {
    const shortest = Math.min(...wanted) * interval;
    throw new InputError(
      'NO_FULL_WINDOW',
      `the longest unbroken stretch for tuning is ${spanWords(longest * interval)}, too short for a window of ${spanWords(shortest)} (${Math.min(...wanted)} samples), expected at least four windows and two samples a window; record for longer without gaps, or change the windows`,
    );
  }
  return [...new Set(fitting)].sort((a, b) => a - b);
}

function ladder(runs: readonly (readonly Float64Array[])[], horizon: number): number[] {
  const channels = runs[0]?.length ?? 1;
  const longest = Math.max(0, ...runs.map((run) => run[0]!.length));
  const most = Math.max(FEWEST_DELAYS, Math.min(Math.floor(MOST_ROWS / channels), Math.floor(longest / 4)));
  const scale = Math.max(
    ...Array.from({ length: channels }, (_, c) => {
      const line = runs.map((run) => run[c]!).filter(({ length }) => length > 2 * FEWEST_DELAYS);
      return line.length === 0 ? FEWEST_DELAYS : chooseDelays(line).delays;
    }),
  );
  const high = Math.min(most, Math.max(2 * scale, horizon));
  const low = Math.min(high, Math.max(FEWEST_DELAYS, Math.round(scale / 2)));
  return Array.from({ length: WINDOWS }, (_, i) => Math.round(low * (high / low) ** (i / (WINDOWS - 1))));
}

/**
 * Ranks to try with a window: as asked for, or 2 to 5, in either case no more than there are rows; by itself none above
 * the noise floor but one.
 *
 * @param floor rank above the noise floor
 */
export function ranksToTry(
  { ranks }: Pick<RehearsalRequest, 'ranks'>,
  rows: number,
  floor: number,
): number[] {
  if (ranks !== null) return ranks.filter((rank) => rank <= rows);
  return RANKS.filter((rank) => rank <= Math.min(rows, Math.max(3, floor + 1)));
}
