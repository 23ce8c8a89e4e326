import type { Columns } from '../../../shared-types/channel.ts';

/** Makes drawing columns of samples as they arrive. */
export interface LiveColumns {
  add(times: Float64Array | null, t0: number, dt: number, values: Float64Array): void;
  /** the columns since the last call, the unfinished one included; null when there are none */
  take(): Columns | null;
}

/** A column is missing time when nothing came for this many intervals. */
const GAP_INTERVALS = 3;

/**
 * Live drawing data: every sample as a column of its own (`width` 0), or the least and greatest value of each column
 * of a fixed raster of `width` seconds. The unfinished column is handed out each time and again under the same start
 * time once there is more in it. A column of NaN marks missing values and missing time.
 *
 * @param width    seconds a column; 0: one column a sample
 * @param interval seconds between samples, null when unknown
 */
export function createLiveColumns(width: number, interval: number | null): LiveColumns {
  const t: number[] = [];
  const low: number[] = [];
  const high: number[] = [];
  let bucket = Number.NaN;
  let last = Number.NaN;
  const gap = interval === null ? Number.POSITIVE_INFINITY : Math.max(GAP_INTERVALS * interval, width);

  const open = (time: number, least: number, greatest: number) => {
    t.push(time);
    low.push(least);
    high.push(greatest);
  };
  const add = (time: number, value: number) => {
    if (time - last > gap) {
      open(last + (time - last) / 2, Number.NaN, Number.NaN);
      bucket = Number.NaN;
    }
    last = time;
    const place = width === 0 ? Number.NaN : Math.floor(time / width);
    const newest = t.length - 1;
    // A column that begins within the history already drawn starts at its first sample, not to replace that.
    if (place !== bucket)
      open(Number.isNaN(bucket) ? time : Math.max(place * width, t[newest] ?? time), value, value);
    else if (Number.isNaN(low[newest]!)) low[newest] = high[newest] = value;
    else {
      if (value < low[newest]!) low[newest] = value;
      if (value > high[newest]!) high[newest] = value;
    }
    bucket = place;
  };

  return {
    add(times, t0, dt, values) {
      for (let i = 0; i < values.length; i++) add(times ? times[i]! : t0 + i * dt, values[i]!);
    },
    take() {
      if (t.length === 0) return null;
      const columns = { t: Float64Array.from(t), low: Float64Array.from(low), high: Float64Array.from(high) };
      const keep = width === 0 ? 0 : 1;
      t.splice(0, t.length - keep);
      low.splice(0, low.length - keep);
      high.splice(0, high.length - keep);
      return columns;
    },
  };
}
