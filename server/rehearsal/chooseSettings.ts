import type { Model } from '../../shared-types/model.ts';
import type { Score } from '../../shared-types/score.ts';
import { scoreChosen } from './chosenTable.ts';
import { type Prepared, prepareTask } from './prepare.ts';
import { provenanceOf } from './provenance.ts';
import { type Settled, searchSettings, tuningGround } from './settle.ts';
import type { RehearsalTask } from './task.ts';
import { traceOf } from './trace.ts';
import { switchWordOf } from './words.ts';

/**
 * The search of a rehearsal alone, for the forcing: window, rank and rule chosen on the tuning part, scored on the rest,
 * without anything beside them to compare with.
 *
 * @returns the model with its rules, score and provenance
 * @throws InputError as `runRehearsal`
 */
export function chooseSettings(task: RehearsalTask): Model {
  const prepared = prepareTask(task);
  const runs = prepared.tuning.flatMap((one) => one.runs.map(({ values }) => values));
  const ground = tuningGround(task, prepared);
  const settled = searchSettings(task, prepared, ground, runs, { beside: false, progress: () => {} });
  const traces = prepared.recordings.map((one) => traceOf(settled.model, one, settled.rule.variable));
  return modelOf(task, prepared, settled, scoreChosen(task, prepared, traces, settled.rule));
}

/** A model with what was chosen for it, what that is worth, and where it comes from. */
export function modelOf(task: RehearsalTask, prepared: Prepared, settled: Settled, score: Score): Model {
  const { regime, regimeChannel } = prepared;
  const { model, rule } = settled;
  return {
    ...model,
    rule,
    regime,
    regimeChannel,
    switchWord: model.switchWord === 'switch' ? switchWordOf(regime) : model.switchWord,
    score,
    provenance: task.model?.provenance ?? provenanceOf(task, prepared),
  };
}
