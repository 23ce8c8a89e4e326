import type { TaskRecording, TaskSeries } from './task.ts';

/** A recording's channels with no values where something was left out. */
export function leftOutSeries({ series, leftOut }: TaskRecording): TaskSeries[] {
  if (leftOut.length === 0) return [...series];
  const inside = (time: number) => leftOut.some(({ from, to }) => time >= from && time <= to);
  return series.map((one) => ({
    ...one,
    values: one.values.map((value, i) => (inside(one.times[i]!) ? Number.NaN : value)),
  }));
}
