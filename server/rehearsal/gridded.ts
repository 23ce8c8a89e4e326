import type { RegimeRule } from '../../shared-types/watch.ts';
import { createGrid, createGridBlock, pushGrid } from '../signal/grid.ts';
import { InputError } from '../signal/inputError.ts';
import type { Stretch } from '../watch/grading.ts';
import { createJointBlock, createJointGrid, pushJointGrid } from '../watch/jointGrid.ts';
import {
  breakRegime,
  type ConfirmedSwitch,
  createRegimeState,
  settledUntil,
  steppedRegime,
  stepRegime,
} from '../watch/regimeRule.ts';
import { framesOf, type RecordedSeries } from './playback.ts';

/** What of a recording is watched, and how switches are told in it. */
export interface GriddingSettings {
  /** in the order of the model */
  channels: readonly string[];
  interval: number;
  gapIntervals: number;
  regime: RegimeRule;
  /** null: the first channel */
  regimeChannel: string | null;
}

/** An unbroken stretch on the grid. */
export interface GriddedRun {
  /** grid time of value 0, seconds, and its whole steps from the recording's start */
  start: number;
  firstStep: number;
  /** one array a channel, in order */
  values: Float64Array[];
  /** time of the newest raw sample each step needed */
  newest: Float64Array;
}

/** A recording on the grid of its first channel, with the switches found in it. */
export interface GriddedRecording {
  interval: number;
  /** first and last grid time, seconds */
  start: number;
  end: number;
  /** time up to which every switch is known, ≤ end */
  known: number;
  runs: GriddedRun[];
  switches: ConfirmedSwitch[];
  /** where the regime channel could not be seen: times of the samples before and after */
  unseen: Stretch[];
}

/**
 * Puts a recording on the grid exactly as a live watch does, and finds its switches.
 *
 * @throws InputError when a channel is not in the recording or has no samples
 */
export function gridRecording(
  series: readonly RecordedSeries[],
  settings: GriddingSettings,
): GriddedRecording {
  const gridded = gridChannels(series, settings);
  if (gridded === null) {
    throw new InputError(
      'NO_COMMON_TIME',
      `the channels ${settings.channels.join(', ')} have no time in common; record them together, or watch one of them`,
    );
  }
  const { start, end, interval, runs } = gridded;
  const { channels } = settings;
  const { switches, unseen, known } = findSwitches(
    seriesOf(series, regimeChannelOf(settings.regime, settings.regimeChannel, channels)),
    settings,
  );
  // only what lies within the watched time can be graded
  const within = switches.filter(({ at }) => at >= start - interval / 2 && at <= end + interval / 2);
  return { interval, start, end, known: Math.min(known, end), runs, switches: within, unseen };
}

/**
 * Puts channels of a recording on the grid, without looking for switches.
 *
 * @returns null where the channels have no time in common
 * @throws InputError when a channel is not in the recording or has no samples
 */
export function gridChannels(
  series: readonly RecordedSeries[],
  settings: Pick<GriddingSettings, 'channels' | 'interval' | 'gapIntervals'>,
): GriddedRecording | null {
  const { interval } = settings;
  const runs = jointRuns(
    settings.channels.map((channel) => seriesOf(series, channel)),
    settings,
  );
  const last = runs.at(-1);
  if (last === undefined) return null;
  const start = runs[0]!.start;
  for (const run of runs) run.firstStep = Math.round((run.start - start) / interval);
  const end = last.start + (last.newest.length - 1) * interval;
  return { interval, start, end, known: end, runs, switches: [], unseen: [] };
}

/** The channel a regime rule reads: that of its marks, the one named, or the first of the watched ones. */
export function regimeChannelOf(
  regime: RegimeRule,
  named: string | null,
  channels: readonly string[],
): string {
  return named ?? (regime.kind === 'marks' ? regime.channel : channels[0]!);
}

/** The recorded channel of this name.
 *
 * @throws InputError when the recording does not have it or it has no samples
 */
export function seriesOf(series: readonly RecordedSeries[], channel: string): RecordedSeries {
  const found = series.find((one) => one.channel === channel);
  if (found === undefined || found.times.length === 0) {
    throw new InputError(
      'NO_SUCH_CHANNEL',
      `the recording has no channel ${channel}, it has ${series.map((one) => one.channel).join(', ')}; name one of these`,
    );
  }
  return found;
}

interface OpenRun {
  start: number;
  values: number[][];
  newest: number[];
}

function jointRuns(
  watched: readonly RecordedSeries[],
  { interval, gapIntervals }: Pick<GriddingSettings, 'interval' | 'gapIntervals'>,
): GriddedRun[] {
  const grid = createJointGrid(watched.length, interval, gapIntervals);
  const leader = createGridBlock();
  const joint = createJointBlock(watched.length);
  const open: OpenRun[] = [];
  // two channels of a model may be one channel of the recording
  const parted = watched.map((series, c) => ({ ...series, channel: String(c) }));
  for (const frame of framesOf(parted)) {
    pushJointGrid(grid, Number(frame.channel), frame.times, frame.t0, frame.dt, frame.values, leader, joint);
    for (let i = 0; i < joint.count; i++) {
      if (joint.starts[i] === 1 || open.length === 0) {
        open.push({ start: joint.time[i]!, values: watched.map(() => []), newest: [] });
      }
      const run = open.at(-1)!;
      for (let c = 0; c < watched.length; c++) run.values[c]!.push(joint.values[c]![i]!);
      run.newest.push(joint.newest[i]!);
    }
  }
  return open.map(({ start, values, newest }) => ({
    start,
    firstStep: 0,
    values: values.map((one) => Float64Array.from(one)),
    newest: Float64Array.from(newest),
  }));
}

/** Steps a regime rule over a recorded channel: its switches, its gaps, and up to when (seconds) no more will be found. */
export function findSwitches(
  { times, values }: RecordedSeries,
  { regime, interval, gapIntervals }: Pick<GriddingSettings, 'regime' | 'interval' | 'gapIntervals'>,
): { switches: ConfirmedSwitch[]; unseen: Stretch[]; known: number } {
  const stepped = steppedRegime(regime, interval);
  const state = createRegimeState(stepped);
  const block = createGridBlock(Math.max(64, values.length + 1));
  const bridging = regime.kind === 'marks' ? 'previous' : 'linear';
  pushGrid(createGrid(interval, gapIntervals, bridging), times, 0, 0, values, block);
  const switches: ConfirmedSwitch[] = [];
  for (let i = 0; i < block.count; i++) {
    if (block.starts[i] === 1) breakRegime(state);
    const found = stepRegime(state, stepped, block.time[i]!, block.value[i]!);
    if (found !== null) switches.push(found);
  }
  return {
    switches,
    unseen: block.gaps.map(({ from, to }) => ({ from, to })),
    known: settledUntil(state, stepped),
  };
}
