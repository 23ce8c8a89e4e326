import { leaveOut } from '../signal/leaveOut.ts';
import type { TaskRecording, TaskSeries } from './task.ts';

/** A recording's channels with no values where something was left out. */
export function leftOutSeries({ series, leftOut }: TaskRecording): TaskSeries[] {
  return series.map((one) => ({ ...one, values: leaveOut(one.times, one.values, leftOut) }));
}
