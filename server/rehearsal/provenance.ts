import type { Model, Provenance } from '../../shared-types/model.ts';
import type { Prepared } from './prepare.ts';
import type { RehearsalTask } from './task.ts';

/** Where a model that a rehearsal fitted comes from: the tuning part of each recording. */
export function provenanceOf(task: RehearsalTask, prepared: Prepared): Provenance {
  const { recordings, judgedFrom, interval } = prepared;
  return {
    recordings: recordings.flatMap(({ start, end }, i) => {
      const { name, sha256, series } = task.recordings[i]!;
      if (judgedFrom[i]! <= start) return [];
      const to = Math.min(end, judgedFrom[i]! - interval);
      const { times } = series.find(({ channel }) => channel === task.request.channels[0])!;
      return [{ name, sha256, from: start, to, samples: times.filter((time) => time <= to).length }];
    }),
    program: task.program,
    fittedAt: task.at,
  };
}

/** Whether a model was fitted on data that this rehearsal judges: then the score says nothing about new data. */
export function overlapsJudged(
  { provenance, interval }: Model,
  task: RehearsalTask,
  { recordings, judgedFrom }: Prepared,
): boolean {
  return recordings.some(({ end }, i) => {
    const { name, sha256 } = task.recordings[i]!;
    return provenance.recordings.some(
      (used) =>
        (used.sha256 === sha256 || used.name === name) &&
        Math.min(used.to, end) > judgedFrom[i]! + 2 * interval &&
        judgedFrom[i]! <= end,
    );
  });
}
