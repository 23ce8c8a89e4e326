import type { Model } from '../../shared-types/model.ts';
import type { Variable } from '../../shared-types/watch.ts';
import { createProjection, projectInto } from '../embedding/projection.ts';
import { type SteppedRule, toSteps } from '../watch/watchRule.ts';
import type { GriddedRecording } from './gridded.ts';

/** Steps in a block of the trace's summary. */
const BLOCK = 32;

/** Windows projected at a time. */
const PROJECTED = 4096;

/** Times of a recording's grid steps, one entry a step from the recording's start; zero within gaps. */
export interface Places {
  /** grid time, seconds */
  time: Float64Array;
  /** the newest raw sample that each step needed, where a warning made of it is stamped: whole step, seconds */
  stamp: Int32Array;
  at: Float64Array;
}

/** The watched variable over a recording, one value a grid step from the recording's start. */
export interface Trace extends Places {
  /** NaN where the window was not full */
  value: Float64Array;
  /** least and greatest value of each block of 32 steps; −∞ and ∞ where one of them is NaN */
  low: Float64Array;
  high: Float64Array;
}

/** The times of a recording's steps; all its traces share them. */
export function placesOf({ interval, start, runs }: GriddedRecording): Places {
  const last = runs.at(-1)!;
  const count = last.firstStep + last.newest.length;
  const places = {
    time: new Float64Array(count),
    stamp: new Int32Array(count),
    at: new Float64Array(count),
  };
  for (const run of runs) {
    for (let i = 0; i < run.newest.length; i++) {
      const step = run.firstStep + i;
      places.time[step] = run.start + i * interval;
      places.at[step] = run.newest[i]!;
      places.stamp[step] = Math.round((run.newest[i]! - start) / interval);
    }
  }
  return places;
}

/** What of a model a trace needs. */
export type Projected = Pick<Model, 'coordinates' | 'delays' | 'rank'> & {
  channels: readonly { mean: number }[];
};

/**
 * The watched variable as a live watch computes it: |forcing|, or the level of the first channel, wherever the
 * model's window is full.
 */
export function traceOf(
  model: Projected,
  recording: GriddedRecording,
  variable: Variable,
  places = placesOf(recording),
): Trace {
  const { delays, rank } = model;
  const projection = createProjection(model.coordinates, model.channels.length, delays, rank);
  const value = new Float64Array(places.time.length).fill(Number.NaN);
  for (const run of recording.runs) {
    const windows = run.newest.length - delays + 1;
    if (windows < 1) continue;
    const first = run.firstStep + delays - 1;
    if (variable === 'level') {
      value.set(run.values[0]!.subarray(delays - 1), first);
      continue;
    }
    const lines = run.values.map((values, c) => {
      const { mean } = model.channels[c]!;
      return values.map((sample) => sample - mean);
    });
    // in blocks, so that the coordinates before the last one take no room
    const out = new Float64Array(PROJECTED * rank);
    for (let i = 0; i < windows; i += PROJECTED) {
      const count = Math.min(PROJECTED, windows - i);
      projectInto(projection, lines, delays - 1 + i, count, out, rank - 1);
      for (let j = 0; j < count; j++) value[first + i + j] = Math.abs(out[j * rank + rank - 1]!);
    }
  }
  return withSummary(value, places);
}

/** A trace of any variable: one value a step, NaN where it is not known. */
export function withSummary(value: Float64Array, places: Places): Trace {
  return { value, ...places, ...summaryOf(value) };
}

function summaryOf(value: Float64Array): { low: Float64Array; high: Float64Array } {
  const blocks = Math.ceil(value.length / BLOCK);
  const low = new Float64Array(blocks).fill(Number.POSITIVE_INFINITY);
  const high = new Float64Array(blocks).fill(Number.NEGATIVE_INFINITY);
  for (let i = 0; i < value.length; i++) {
    const block = Math.floor(i / BLOCK);
    const v = value[i]!;
    if (!(v >= low[block]!)) low[block] = Number.isNaN(v) ? Number.NEGATIVE_INFINITY : v;
    if (!(v <= high[block]!)) high[block] = Number.isNaN(v) ? Number.POSITIVE_INFINITY : v;
  }
  return { low, high };
}

/**
 * The warnings that a watch rule issues over the first `steps` steps of a trace: as stepping it over every value, but
 * blocks in which nothing can happen are passed over.
 *
 * @param out overwritten with the steps whose values warn, ascending; at least `steps` long
 * @returns how many there are
 */
export function warningsInto(trace: Trace, steps: number, rule: SteppedRule, out: Int32Array): number {
  const { value, time, low, high } = trace;
  const { interval, sign, threshold, rearm, onDelay, holdOff } = rule;
  const tops = sign === 1 ? high : low;
  const bottoms = sign === 1 ? low : high;
  let armed = true;
  let above = 0;
  let lastWarning = Number.NEGATIVE_INFINITY;
  let size = 0;
  for (let i = 0; i < steps; ) {
    if (i % BLOCK === 0) {
      const block = i / BLOCK;
      const idle = armed
        ? above === 0 && !(sign * tops[block]! > threshold)
        : !(sign * bottoms[block]! < rearm);
      if (idle) {
        i += BLOCK;
        continue;
      }
    }
    const s = sign * value[i]!;
    if (!armed) {
      if (s < rearm) {
        armed = true;
        above = 0;
      }
    } else {
      above = s > threshold ? above + 1 : 0;
      if (above > onDelay) {
        armed = false;
        above = 0;
        if (toSteps(time[i]! - lastWarning, interval) >= holdOff) {
          lastWarning = time[i]!;
          out[size++] = i;
        }
      }
    }
    i++;
  }
  return size;
}
