import type { RecordedChannel } from '../recordings/recording.ts';
import { framesOf } from '../rehearsal/playback.ts';
import { createGridBlock, gridRuns } from '../signal/grid.ts';
import { createJointBlock, createJointGrid, pushJointGrid } from '../watch/jointGrid.ts';

/**
 * Channels on one grid, as a live watch would see them, cut into runs at gaps: runs[i][c].
 *
 * @param series the first one leads: the grid is its own
 */
export function runsOf(
  series: readonly RecordedChannel[],
  interval: number,
  gapIntervals: number,
): Float64Array[][] {
  if (series.length === 1) {
    return gridRuns(series[0]!.times, series[0]!.values, interval, gapIntervals).map(({ values }) => [
      values,
    ]);
  }
  const grid = createJointGrid(series.length, interval, gapIntervals);
  const leader = createGridBlock();
  const joint = createJointBlock(series.length);
  const open: number[][][] = [];
  for (const frame of framesOf(series)) {
    const channel = series.findIndex((one) => one.channel === frame.channel);
    pushJointGrid(grid, channel, frame.times, frame.t0, frame.dt, frame.values, leader, joint);
    for (let i = 0; i < joint.count; i++) {
      if (open.length === 0 || joint.starts[i] === 1) open.push(series.map(() => []));
      for (let c = 0; c < series.length; c++) open.at(-1)![c]!.push(joint.values[c]![i]!);
    }
  }
  return open.map((run) => run.map((values) => Float64Array.from(values)));
}
