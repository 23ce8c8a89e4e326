import { isBlind, type Steps, spannedWithin, watchedWithin } from './tally.ts';

/** Resamples. */
const RESAMPLES = 2000;

/**
 * What a warner did, cut at the judged switches: block i is the stretch of time after switch i − 1 up to and with switch
 * i. One entry a block, in time order, recordings one after the other.
 */
export interface Blocks {
  /** 1 where its switch counts (is not blind), and where it was warned of */
  counted: Uint8Array;
  warned: Uint8Array;
  /** watched steps, and those of them inside the spans */
  watched: Int32Array;
  spanned: Int32Array;
}

/**
 * Cuts one recording into blocks. What comes after its last switch goes to the block of the first one, as on a circle;
 * without any scored switch all of it is one block in which nothing counts.
 *
 * @param warnings ascending steps; the first `size` entries count
 * @param cover    of each switch the index of the first warning that covers it, −1: none
 */
export function blocksOf(steps: Steps, warnings: Int32Array, size: number, cover: Int32Array): Blocks {
  const { switches, scoredFrom, count } = steps;
  const first = switches.findIndex((e) => e >= scoredFrom);
  const scored = first === -1 ? [] : [...switches.keys()].slice(first);
  const ends = [...scored.map((i) => switches[i]! + 1), Math.max(count, scoredFrom)];
  const from = [scoredFrom, ...ends];
  const watched = ends.map((end, i) => watchedWithin(steps, from[i]!, end));
  const spanned = ends.map((end, i) => spannedWithin(steps, warnings, size, from[i]!, end));
  if (scored.length > 0) {
    watched[0]! += watched.pop()!;
    spanned[0]! += spanned.pop()!;
  }
  const counted = scored.map((i) => !isBlind(steps, switches[i]!));
  const blocks = watched.length;
  return {
    counted: Uint8Array.from({ length: blocks }, (_, k) => Number(counted[k] ?? false)),
    warned: Uint8Array.from({ length: blocks }, (_, k) =>
      Number((counted[k] ?? false) && cover[scored[k]!] !== -1),
    ),
    watched: Int32Array.from(watched),
    spanned: Int32Array.from(spanned),
  };
}

/** Blocks of several recordings, one after the other. */
export function joinBlocks(parts: readonly Blocks[]): Blocks {
  return {
    counted: Uint8Array.from(parts.flatMap(({ counted }) => [...counted])),
    warned: Uint8Array.from(parts.flatMap(({ warned }) => [...warned])),
    watched: Int32Array.from(parts.flatMap(({ watched }) => [...watched])),
    spanned: Int32Array.from(parts.flatMap(({ spanned }) => [...spanned])),
  };
}

/**
 * The difference in skill of two warners judged on the same switches, with its 95 % percentile interval from a block
 * bootstrap. What is drawn again, with replacement, are switches together with the time before each: for both warners
 * whether it was warned of and how much of that time lay in spans, so that the share of switches warned and the share of
 * time in spans vary as they would in another recording. Neighbours depend on each other (a span may reach over a switch,
 * switches come in clusters), so runs of about n^(1/3) blocks in a row are drawn, around the end.
 *
 * @param uniform seeded, in [0, 1)
 * @see Efron, Tibshirani 1993, An Introduction to the Bootstrap, ch. 13 (percentile interval) and 8.6 (moving blocks)
 * @see Künsch 1989, Annals of Statistics 17, 1217 (blocks in a row)
 * @see Politis, Romano 1992, in LePage, Billard (eds.), Exploring the Limits of Bootstrap, 263 (around the end)
 * @see Hall, Horowitz, Jing 1995, Biometrika 82, 561 (their length)
 */
export function skillDifference(
  ours: Blocks,
  theirs: Blocks,
  uniform: () => number,
  resamples = RESAMPLES,
): { value: number; low: number; high: number } {
  const blocks = ours.counted.length;
  const length = Math.max(1, Math.round(Math.cbrt(blocks)));
  const draws = Math.max(1, Math.round(blocks / length));
  const runs = sumsOfRuns(ours, theirs, length);
  const drawn = new Float64Array(resamples);
  const sum = new Float64Array(KEYS);
  for (let r = 0; r < resamples; r++) {
    sum.fill(0);
    for (let i = 0; i < draws; i++) {
      const from = KEYS * Math.floor(uniform() * blocks);
      for (let k = 0; k < KEYS; k++) sum[k]! += runs[from + k]!;
    }
    drawn[r] = differenceOf(sum);
  }
  drawn.sort();
  return {
    value: differenceOf(sumsOfRuns(ours, theirs, blocks).subarray(0, KEYS)),
    low: drawn[Math.floor(0.025 * resamples)]!,
    high: drawn[Math.ceil(0.975 * resamples) - 1]!,
  };
}

/** Warned, counted, spanned, watched of both warners. */
const KEYS = 8;

/** Of each block the sums over it and the next ones, `length` in all, around the end; KEYS numbers a block. */
function sumsOfRuns(ours: Blocks, theirs: Blocks, length: number): Float64Array {
  const columns = [ours, theirs].flatMap(({ warned, counted, spanned, watched }) => [
    warned,
    counted,
    spanned,
    watched,
  ]);
  const blocks = ours.counted.length;
  const sums = new Float64Array(blocks * KEYS);
  columns.forEach((column, k) => {
    let sum = 0;
    for (let i = 0; i < length; i++) sum += column[i % blocks]!;
    for (let i = 0; i < blocks; i++) {
      sums[KEYS * i + k] = sum;
      sum += column[(i + length) % blocks]! - column[i]!;
    }
  });
  return sums;
}

const differenceOf = (sum: Float64Array): number => skillAt(sum, 0) - skillAt(sum, 4);

/** detection − τ of sums that begin at `at`; a share of nothing is 0. */
const skillAt = (sum: Float64Array, at: number): number =>
  shareOf(sum[at]!, sum[at + 1]!) - shareOf(sum[at + 2]!, sum[at + 3]!);

const shareOf = (part: number, whole: number): number => (whole === 0 ? 0 : part / whole);
