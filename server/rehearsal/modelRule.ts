import type { Model } from '../../shared-types/model.ts';
import type { Score } from '../../shared-types/score.ts';
import type { WatchRule } from '../../shared-types/watch.ts';
import { scoreChosen } from './chosenTable.ts';
import { prepareTask } from './prepare.ts';
import { fitTo, tuningGround } from './settle.ts';
import type { RehearsalTask } from './task.ts';
import { traceOf } from './trace.ts';
import { bestTuned, type Ground, mannersOn, thresholdsOf, triedOn, tune } from './tune.ts';
import { forcingSignal, nothingToWarnOf } from './variables.ts';

/**
 * The rule for a given model's forcing, with the usual manner (re-arm, on-delay, hold-off) and the threshold chosen on
 * all of the recordings.
 *
 * @throws InputError when no switch in them could have been warned of
 */
export function chooseRule(task: RehearsalTask, model: Model): WatchRule {
  const prepared = prepareTask({ ...task, model, request: { ...task.request, tunePart: 0 } });
  return ruleOn(tuningGround(task, prepared), model);
}

/**
 * What choosing so is worth: window and rank of a model fitted to the tuning part alone, its rule chosen there, and both
 * scored on the rest.
 *
 * @throws InputError when there is too little to put half of it aside
 */
export function scoreOfChoice(task: RehearsalTask, model: Model): Score {
  const prepared = prepareTask({ ...task, model });
  const runs = prepared.tuning.flatMap((one) => one.runs.map(({ values }) => values));
  const fitted = fitTo(prepared, runs, model.delays, model.rank, model.center);
  const rule = ruleOn(tuningGround(task, prepared), fitted);
  const traces = prepared.recordings.map((one) => traceOf(fitted, one, rule.variable));
  return scoreChosen(task, prepared, traces, rule);
}

function ruleOn(ground: Ground, model: Model): WatchRule {
  const signal = forcingSignal(model);
  const tried = triedOn(ground, signal);
  const [usual] = mannersOn(ground, tried, signal);
  const { tuned } = tune(ground, tried, signal, [usual!], thresholdsOf(signal, tried));
  const best = bestTuned(tuned, ground.ceiling);
  if (best === null) throw nothingToWarnOf();
  return best.point.rule;
}
