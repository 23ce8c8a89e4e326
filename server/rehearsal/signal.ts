import type { Variable, WatchRule } from '../../shared-types/watch.ts';
import type { GriddedRecording } from './gridded.ts';
import type { Places, Trace } from './trace.ts';

/** Something a rule can watch: a variable of a model, or a baseline. */
export interface Signal {
  /** in plain words: "forcing", "level rising", "running variance falling", "a clock" */
  name: string;
  /** how it is made, in words, as far as that was chosen: "over 12 s"; empty when there is nothing to say */
  setting: string;
  /** what the watch room calls it; baselines that no watch knows count as levels */
  variable: Variable;
  direction: WatchRule['direction'];
  /** quiet is zero, so that re-arm may be a share of the threshold */
  quietIsZero: boolean;
  /** the only thresholds there are; null: spread over its values */
  thresholds: readonly number[] | null;
  /** one value a grid step, known from the samples up to it alone; NaN where it is not known */
  trace(recording: GriddedRecording, places: Places): Trace;
}

/** Both directions of a variable that is read from a trace. */
export function bothDirections(
  name: string,
  setting: string,
  trace: Signal['trace'],
): [rising: Signal, falling: Signal] {
  const make = (direction: WatchRule['direction']): Signal => ({
    name: `${name} ${direction}`,
    setting,
    variable: 'level',
    direction,
    quietIsZero: false,
    thresholds: null,
    trace,
  });
  return [make('rising'), make('falling')];
}
