import { runningAutocorrelationInto, runningVarianceInto } from '../signal/slidingIndicators.ts';
import type { GriddedRecording, GriddedRun } from './gridded.ts';
import { bothDirections, type Signal } from './signal.ts';
import { type Places, type Trace, withSummary } from './trace.ts';
import { spanWords } from './words.ts';

/** What the baselines' few settings are chosen around. */
export interface BaselineScales {
  /** seconds */
  interval: number;
  /** the signal's own time scale, the horizon and the room a span has (horizon − least lead), in steps */
  scale: number;
  horizon: number;
  room: number;
  /** usual time between switches, steps */
  between: number;
  /** of the first channel over the tuning part */
  mean: number;
  /** the longest window allowed, steps */
  most: number;
}

/** Signals of one baseline with different settings; the best of them stands for it. */
export type Family = readonly Signal[];

/**
 * The plain warners every model has to beat: what anybody could read off the first channel, the time since the last
 * switch, and a clock. (The level itself is a variable of the watch and comes with those.)
 */
export function baselineFamilies(scales: BaselineScales): Family[] {
  const { interval, scale, horizon, mean, most } = scales;
  const short = windowsWithin([2, scale / 2, scale], 2, most);
  const long = windowsWithin([2 * scale, 8 * scale, 4 * horizon], 8, most);
  return [
    ...familiesOf('distance from the mean', [1], interval, (run) =>
      run.values[0]!.map((value) => Math.abs(value - mean)),
    ),
    ...familiesOf('rate of change', short, interval, (run, lag) => rateOf(run.values[0]!, lag, interval)),
    ...familiesOf('running variance', long, interval, (run, window) =>
      indicatorOf(runningVarianceInto, run, window),
    ),
    ...familiesOf('lag-1 autocorrelation', long, interval, (run, window) =>
      indicatorOf(runningAutocorrelationInto, run, window),
    ),
    [sinceSwitch()],
    clocks(scales),
  ];
}

function windowsWithin(wanted: readonly number[], fewest: number, most: number): number[] {
  return [
    ...new Set(
      wanted.map((window) => Math.round(Math.min(Math.max(fewest, window), Math.max(fewest, most)))),
    ),
  ];
}

/** A baseline in both directions, with each of its windows (steps). */
function familiesOf(
  name: string,
  windows: readonly number[],
  interval: number,
  of: (run: GriddedRun, window: number) => Float64Array,
): Family[] {
  const pairs = windows.map((window) =>
    bothDirections(
      name,
      windows.length > 1 ? `over ${spanWords(window * interval)}` : '',
      (recording, places) => perRun(recording, places, (run) => of(run, window)),
    ),
  );
  return [pairs.map(([rising]) => rising), pairs.map(([, falling]) => falling)];
}

/** A trace made run by run: `of` gives one value a step of the run, NaN where it is not known yet. */
function perRun({ runs }: GriddedRecording, places: Places, of: (run: GriddedRun) => Float64Array): Trace {
  const value = new Float64Array(places.time.length).fill(Number.NaN);
  for (const run of runs) value.set(of(run), run.firstStep);
  return withSummary(value, places);
}

function indicatorOf(indicator: typeof runningVarianceInto, run: GriddedRun, window: number): Float64Array {
  const out = new Float64Array(run.newest.length);
  indicator(run.values[0]!, window, out);
  return out;
}

function rateOf(values: Float64Array, lag: number, interval: number): Float64Array {
  const rate = new Float64Array(values.length).fill(Number.NaN);
  for (let i = lag; i < values.length; i++) rate[i] = (values[i]! - values[i - lag]!) / (lag * interval);
  return rate;
}

/** Seconds since the onset of the last switch that was confirmed by then. */
function sinceSwitch(): Signal {
  return {
    name: 'time since the last switch',
    setting: '',
    variable: 'level',
    direction: 'rising',
    quietIsZero: false,
    thresholds: null,
    trace: ({ switches, runs, interval }, places) => {
      const value = new Float64Array(places.time.length).fill(Number.NaN);
      let known = 0;
      for (const { start, firstStep, newest } of runs) {
        for (let i = 0; i < newest.length; i++) {
          const time = start + i * interval;
          while (known < switches.length && switches[known]!.confirmedAt <= time + interval / 2) known++;
          if (known > 0) value[firstStep + i] = time - switches[known - 1]!.at;
        }
      }
      return withSummary(value, places);
    },
  };
}

/** Periods and phases of the clock. */
const PERIODS = 10;
const PHASES = 4;

function clocks({ interval, room, between }: BaselineScales): Family {
  const shortest = Math.max(2, room);
  const longest = Math.max(4 * shortest, 4 * between);
  return Array.from({ length: PERIODS * PHASES }, (_, i) => {
    const period = shortest * (longest / shortest) ** (Math.floor(i / PHASES) / (PERIODS - 1)) * interval;
    return clock(period, (i % PHASES) / PHASES);
  });
}

/** Calls once every `period` seconds of channel time, whatever the signal does. */
function clock(period: number, phase: number): Signal {
  return {
    name: 'a clock',
    setting: `every ${spanWords(period)}`,
    variable: 'level',
    direction: 'rising',
    quietIsZero: true,
    thresholds: [0.5],
    trace: ({ runs, interval }, places) => {
      const value = new Float64Array(places.time.length).fill(Number.NaN);
      for (const { start, firstStep, newest } of runs) {
        let turn = Math.floor((start - interval) / period - phase);
        for (let i = 0; i < newest.length; i++) {
          const now = Math.floor((start + i * interval) / period - phase);
          value[firstStep + i] = now > turn ? 1 : 0;
          turn = now;
        }
      }
      return withSummary(value, places);
    },
  };
}
