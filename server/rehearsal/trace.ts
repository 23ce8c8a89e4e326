import type { Model } from '../../shared-types/model.ts';
import type { Variable } from '../../shared-types/watch.ts';
import { createProjection, projectInto } from '../embedding/projection.ts';
import { type SteppedRule, toSteps } from '../watch/watchRule.ts';
import type { GriddedRecording } from './gridded.ts';

/** Steps in a block of the trace's summary. */
const BLOCK = 32;

/** The watched variable over a recording, one value a grid step from the recording's start. */
export interface Trace {
  /** NaN where the window was not full */
  value: Float64Array;
  /** grid time, seconds; only where the window was full */
  time: Float64Array;
  /** the newest raw sample that each value needed, where a warning made of it is stamped: whole step, seconds */
  stamp: Int32Array;
  at: Float64Array;
  /** least and greatest value of each block of 32 steps; −∞ and ∞ where one of them is NaN */
  low: Float64Array;
  high: Float64Array;
}

/**
 * The watched variable as a live watch computes it: |forcing|, or the level of the first channel, wherever the
 * model's window is full.
 */
export function traceOf(model: Model, recording: GriddedRecording, variable: Variable): Trace {
  const { interval, start, runs } = recording;
  const { delays, rank } = model;
  const projection = createProjection(model.coordinates, model.channels.length, delays, rank);
  const last = runs.at(-1)!;
  const count = last.firstStep + last.newest.length;
  const value = new Float64Array(count).fill(Number.NaN);
  const time = new Float64Array(count);
  const stamp = new Int32Array(count);
  const at = new Float64Array(count);
  for (const run of runs) {
    const length = run.newest.length;
    if (length < delays) continue;
    const windows = length - delays + 1;
    const out = new Float64Array(variable === 'forcing' ? windows * rank : 0);
    if (variable === 'forcing') {
      const lines = run.values.map((values, c) => values.map((sample) => sample - model.channels[c]!.mean));
      projectInto(projection, lines, delays - 1, windows, out, rank - 1);
    }
    for (let i = 0; i < windows; i++) {
      const step = run.firstStep + delays - 1 + i;
      value[step] =
        variable === 'forcing' ? Math.abs(out[i * rank + rank - 1]!) : run.values[0]![delays - 1 + i]!;
      time[step] = run.start + (delays - 1 + i) * interval;
      at[step] = run.newest[delays - 1 + i]!;
      stamp[step] = Math.round((at[step]! - start) / interval);
    }
  }
  return { value, time, stamp, at, ...summaryOf(value) };
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
