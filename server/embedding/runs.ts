/**
 * Uniformly sampled runs of one or several channels, with what is taken off each channel and what it is multiplied
 * with before windows are formed: line = (value − mean) · weight. Windows never cross from one run to the next.
 */
export interface Runs {
  /** samples[i][c]: channel c in run i, oldest first; the same length for every channel of a run */
  samples: readonly (readonly Float64Array[])[];
  /** one per channel, in the channel's unit */
  means: Float64Array;
  /** one per channel, in 1/unit */
  weights: Float64Array;
}

/** Number of windows of `delays` samples in all runs together. */
export function countWindows(runs: Runs, delays: number): number {
  let windows = 0;
  for (const run of runs.samples) windows += Math.max(0, run[0]!.length - delays + 1);
  return windows;
}

/** out[i] = (values[from + i] − mean) · weight for i < count; `out` is overwritten up to count. */
export function lineInto(
  values: Float64Array,
  from: number,
  count: number,
  mean: number,
  weight: number,
  out: Float64Array,
): void {
  for (let i = 0; i < count; i++) out[i] = (values[from + i]! - mean) * weight;
}
