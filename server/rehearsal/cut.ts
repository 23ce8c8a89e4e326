import type { GradingSpans, Stretch } from '../watch/grading.ts';
import { toSteps } from '../watch/watchRule.ts';
import type { GriddedRecording } from './gridded.ts';
import { toStretch } from './score.ts';
import type { Steps } from './tally.ts';
import type { Trace } from './trace.ts';

/**
 * A recording as if it had ended before `until` (seconds): its values are shared, its switches are those that had come.
 *
 * @returns null when nothing of it lies before
 */
export function cutBefore(recording: GriddedRecording, until: number): GriddedRecording | null {
  const { start, interval, switches, unseen } = recording;
  const runs = recording.runs.flatMap((run) => {
    const length = Math.min(run.newest.length, Math.ceil((until - run.start) / interval));
    if (length < 1) return [];
    return [
      {
        ...run,
        values: run.values.map((values) => values.subarray(0, length)),
        newest: run.newest.subarray(0, length),
      },
    ];
  });
  const last = runs.at(-1);
  if (last === undefined) return null;
  const end = last.start + (last.newest.length - 1) * interval;
  return {
    interval,
    start,
    end,
    known: end,
    runs,
    switches: switches.filter(({ at }) => at <= end),
    unseen,
  };
}

/** Grid times of the first and last step of every stretch with a full window. */
export function sightOf({ runs, interval }: GriddedRecording, { value }: Trace): Stretch[] {
  const sight: Stretch[] = [];
  for (const { start, firstStep, newest } of runs) {
    let first = 0;
    while (first < newest.length && Number.isNaN(value[firstStep + first]!)) first++;
    if (first === newest.length) continue;
    sight.push({ from: start + first * interval, to: start + (newest.length - 1) * interval });
  }
  return sight;
}

/** A recording in whole grid steps, as watching a trace sees it; counted from `scoredFrom` (seconds) on. */
export function stepsOfTrace(
  recording: GriddedRecording,
  trace: Trace,
  spans: GradingSpans,
  scoredFrom = recording.start,
): Steps {
  const switches = recording.switches.map(({ at }) => at);
  const record = { ...recording, switches, warnings: [], scoredFrom, sight: sightOf(recording, trace) };
  return toStretch(record, spans);
}

/** Least lead and horizon (seconds) in whole grid steps. */
export function spansOf(
  { leastLead, horizon }: { leastLead: number; horizon: number },
  interval: number,
): GradingSpans {
  return { interval, leastLead: toSteps(leastLead, interval), horizon: toSteps(horizon, interval) };
}
