import type { Model } from '../../shared-types/model.ts';
import type { WatchRule } from '../../shared-types/watch.ts';
import { fitModel } from '../model/fit.ts';
import { foldStarts } from './folds.ts';
import type { Manner } from './manner.ts';
import type { Prepared } from './prepare.ts';
import type { RehearsalTask } from './task.ts';
import { choosePoint } from './threshold.ts';
import { delaysToTry } from './toTry.ts';
import {
  createGround,
  freeGround,
  type Ground,
  PLAIN,
  sweep,
  type Tuned,
  thresholdsOf,
  triedOn,
} from './tune.ts';
import {
  chooseVariable,
  forcingSignal,
  levelSignals,
  nothingToWarnOf,
  type SearchedVariables,
  searchVariables,
  type TunedVariable,
  tuneLevels,
} from './variables.ts';

/** Rows of the operating table, besides the chosen one. */
export const ROWS = 120;
/** Delays and rank of the model that a plain level is watched with: as short a window as there is. */
const LEVEL_DELAYS = 4;
const LEVEL_RANK = 2;

/** What is judged: the chosen variable with its model and rule, and the others beside it. */
export interface Settled {
  model: Model;
  chosen: TunedVariable;
  /** the other variables, with their own choices */
  others: Tuned[];
  rule: WatchRule;
  weak: boolean;
  pairs: SearchedVariables['pairs'];
  tried: number;
}

/** How a search is made. */
export interface SearchManner {
  /** tune the plain levels as well where only the forcing was asked for: to stand beside it */
  beside: boolean;
  progress: (done: number, doing: string) => void;
}

/** Searches settings on the tuning part and fits the chosen window and rank to all of it. */
export function searchSettings(
  task: RehearsalTask,
  prepared: Prepared,
  ground: Ground,
  runs: readonly (readonly Float64Array[])[],
  { beside, progress }: SearchManner,
): Settled {
  const { request } = task;
  const delays = delaysToTry(runs, request, prepared.spans.horizon, prepared.interval);
  const levelDelays = request.windows === null ? LEVEL_DELAYS : Math.min(...delays);
  const level = fitTo(prepared, runs, levelDelays, LEVEL_RANK);
  const levels = beside || request.variable !== 'forcing' ? level : null;
  const searched = searchVariables(ground, runs, request, delays, levels, progress);
  const chosen = chooseVariable(searched, request.variable, ground.ceiling);
  progress(0.97, 'fitting the chosen window and rank');
  const model = chosen.signal.name === 'forcing' ? fitTo(prepared, runs, chosen.delays, chosen.rank) : level;
  const final = settle(ground, model, chosen, request.threshold);
  const others = [...(searched.forcing === null ? [] : [searched.forcing]), ...searched.levels].filter(
    (one) => one.signal.name !== chosen.signal.name,
  );
  const { pairs, tried } = searched;
  return {
    model,
    chosen: final,
    others,
    rule: final.point.rule,
    weak: final.weak,
    pairs,
    tried: tried + ROWS,
  };
}

/** The tuning part in folds, as what a search tries settings on. */
export function tuningGround({ request }: RehearsalTask, { tuning, spans }: Prepared): Ground {
  const { falsePerHour, cameTrue } = request.ceiling;
  const ceiling = falsePerHour === null && cameTrue === null ? null : request.ceiling;
  return createGround(
    tuning,
    foldStarts(tuning),
    tuning.map(({ start }) => start),
    { spans, asked: request, ceiling },
  );
}

/** Fits one window and rank to runs[i][c]; those shorter than the window are left out. */
export function fitTo(
  { interval, gapIntervals, channels }: Prepared,
  runs: readonly (readonly Float64Array[])[],
  delays: number,
  rank: number,
  center: 'mean' | 'none' = 'mean',
): Model {
  const long = runs.filter((run) => run[0]!.length >= delays);
  const name = channels.map(({ channel }) => channel).join(', ');
  return fitModel(long, interval, { name, channels, delays, rank, center, gapIntervals });
}

/** The threshold of the chosen setting, on the model as it was fitted to all of the tuning part. */
function settle(ground: Ground, model: Model, chosen: TunedVariable, held: number | null): TunedVariable {
  const signal = signalOf(model, chosen.signal.name);
  const tried = triedOn(ground, signal);
  const thresholds = held === null ? thresholdsOf(signal, tried, ROWS) : [held];
  const plainly = chosen.weak && ground.ceiling === null;
  const points = sweep(ground, tried, signal, chosen.manner, thresholds);
  const best = choosePoint(points, plainly ? PLAIN : ground.ceiling);
  if (best === null) return { ...chosen, signal };
  return { ...chosen, signal, point: best.point, weak: plainly || best.weak };
}

const signalOf = (model: Model, name: string) =>
  [forcingSignal(model), ...levelSignals(model)].find((one) => one.name === name)!;

/** The model's own rule, as if it had been chosen. */
export function givenModel(model: Model, ground: Ground): Settled {
  const rule = model.rule!;
  const name = rule.variable === 'forcing' ? 'forcing' : `level ${rule.direction}`;
  const signal = signalOf(model, name);
  const manner: Manner = {
    rearm:
      rule.variable === 'forcing'
        ? { kind: 'share', by: rule.rearm / rule.threshold }
        : { kind: 'distance', by: Math.abs(rule.threshold - rule.rearm) },
    onDelay: rule.onDelay,
    holdOff: rule.holdOff,
  };
  const tried = triedOn(ground, signal);
  const given = { ...signal, thresholds: [rule.threshold] };
  const best = choosePoint(sweep(ground, tried, given, manner, given.thresholds), ground.ceiling);
  if (best === null) throw nothingToWarnOf();
  const point = { ...best.point, rule };
  const { delays, rank } = model;
  const plain = { merit: point, point };
  const chosen = { signal, manner, merit: point, point, weak: best.weak, plain, delays, rank };
  const others = tuneLevels(freeGround(ground), model, null).levels.filter((one) => one.signal.name !== name);
  return { model, chosen, others, rule, weak: best.weak, pairs: [], tried: 1 };
}
