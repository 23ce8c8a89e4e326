import type { RehearsalRequest, TriedSetting } from '../../shared-types/rehearsal.ts';
import { InputError } from '../signal/inputError.ts';
import { type Forcing, forcingsOf } from './forcings.ts';
import { bothDirections, type Signal } from './signal.ts';
import { type Ceiling, choosePoint } from './threshold.ts';
import { type Projected, traceOf } from './trace.ts';
import {
  bestTuned,
  freeGround,
  type Ground,
  mannersOn,
  PLAIN,
  type Tuned,
  thresholdsOf,
  triedOn,
  tune,
} from './tune.ts';
import { spanWords } from './words.ts';

/** A tuned variable with the window and rank that it is made of. */
export interface TunedVariable extends Tuned {
  delays: number;
  rank: number;
}

/** What a search over variables found. */
export interface SearchedVariables {
  /** the best of each variable by what choosing it is worth; null: none with a switch that counts */
  forcing: TunedVariable | null;
  levels: TunedVariable[];
  pairs: TriedSetting[];
  /** rules tried */
  tried: number;
}

/** Pairs whose re-arm, on-delay and hold-off are searched. */
const REFINED = 4;
/** Thresholds in that search, and of every pair where the tuning part has more steps than this. */
const REFINED_THRESHOLDS = 32;
const LONG = 500_000;

/**
 * Searches windows × ranks × thresholds with the usual manner (re-arm, on-delay, hold-off), then the manners of the
 * pairs that did best, then the levels with all manners. Every choice but that of the threshold is by skill on folds
 * that did not choose the threshold.
 *
 * @param runs   runs[i][c] of the tuning part, for the singular vectors
 * @param delays windows to try
 * @param level  a model with a short window, for its level; null: only the forcing is searched
 */
export function searchVariables(
  ground: Ground,
  runs: readonly (readonly Float64Array[])[],
  request: RehearsalRequest,
  delays: readonly number[],
  level: Projected | null,
  progress: (share: number, doing: string) => void,
): SearchedVariables {
  const { ceiling, spans } = ground;
  const pairs: TunedVariable[] = [];
  let tried = 0;
  const forcings: Forcing[] = [];
  const wanted = request.variable === 'level' ? [] : delays;
  wanted.forEach((window, w) => {
    progress(
      (0.8 * w) / wanted.length,
      `windows of ${spanWords(window * spans.interval)} (${w + 1} of ${wanted.length})`,
    );
    for (const forcing of forcingsOf(runs, window, request)) {
      forcings.push(forcing);
      const signal = forcingSignal(forcing.projected);
      const found = tuneSignal(ground, signal, request.threshold, 1);
      tried += found.rules;
      pairs.push(...found.tuned.map((one) => ({ ...one, delays: window, rank: forcing.rank })));
    }
  });
  const evened = evenedOut(pairs);
  const refined = shortList(evened, ceiling).flatMap((pair, i, { length }) => {
    progress(0.8 + (0.15 * i) / length, 're-arm, on-delay and hold-off');
    const { projected } = forcings.find(({ delays, rank }) => delays === pair.delays && rank === pair.rank)!;
    const found = tuneSignal(ground, forcingSignal(projected), request.threshold, Number.POSITIVE_INFINITY);
    tried += found.rules;
    const raw = pairs.find(({ delays, rank }) => delays === pair.delays && rank === pair.rank)!;
    return [pair, ...found.tuned.map((one) => shifted({ ...raw, ...one }, raw, pair))];
  });
  progress(0.95, 'plain levels');
  const { levels, rules } = level === null ? { levels: [], rules: 0 } : levelsAsked(ground, level, request);
  tried += rules;
  const forcing = bestTuned(refined, ceiling);
  const all = [...bestOfPairs(evened, refined, ceiling), ...levels];
  return { forcing, levels, pairs: all.map((one) => toTriedSetting(one, spans.interval)), tried };
}

/** The levels, with what was held fixed only where they alone were asked for: it was meant for their scale. */
const levelsAsked = (ground: Ground, level: Projected, { variable, threshold }: RehearsalRequest) =>
  variable === 'level' ? tuneLevels(ground, level, threshold) : tuneLevels(freeGround(ground), level, null);

/** The variable that a model's last coordinate is. */
export function forcingSignal(model: Projected): Signal {
  return {
    name: 'forcing',
    setting: '',
    variable: 'forcing',
    direction: 'rising',
    quietIsZero: true,
    thresholds: null,
    trace: (recording, places) => traceOf(model, recording, 'forcing', places),
  };
}

/** The level of a model's first channel, rising and falling. */
export function levelSignals(model: Projected): Signal[] {
  return bothDirections('level', '', (recording, places) => traceOf(model, recording, 'level', places));
}

/** The level of a model's first channel in both directions, each tuned with all manners. */
export function tuneLevels(
  ground: Ground,
  model: Projected,
  held: number | null,
): { levels: TunedVariable[]; rules: number } {
  let rules = 0;
  const levels = levelSignals(model).flatMap((signal) => {
    const found = tuneSignal(ground, signal, held, Number.POSITIVE_INFINITY);
    rules += found.rules;
    const best = bestTuned(found.tuned, ground.ceiling);
    return best === null ? [] : [{ ...best, delays: model.delays, rank: model.rank }];
  });
  return { levels, rules };
}

function tuneSignal(ground: Ground, signal: Signal, held: number | null, manners: number) {
  const tried = triedOn(ground, signal);
  const all = mannersOn(ground, tried, signal);
  const long = tried.reduce((sum, { steps }) => sum + steps.count, 0) > LONG;
  const count = long || (all.length > 1 && manners > 1) ? REFINED_THRESHOLDS : undefined;
  const thresholds = held === null ? thresholdsOf(signal, tried, count) : [held];
  return tune(ground, tried, signal, all.slice(0, manners), thresholds);
}

/**
 * The skill of each pair averaged with that of the next shorter and longer window at the same rank, with weights
 * (1, 2, 1)/4: of many pairs one is always lucky, while a window that really serves has neighbours that serve nearly as
 * well. Own; measured on noise-driven double wells, where the single best of some fifty pairs kept nothing of its skill.
 */
function evenedOut(pairs: readonly TunedVariable[]): TunedVariable[] {
  return pairs.map((pair) => {
    const row = pairs.filter(({ rank }) => rank === pair.rank);
    const at = row.indexOf(pair);
    const near = [row[at - 1], pair, pair, row[at + 1]].filter((one) => one !== undefined);
    const mean = (skill: (one: TunedVariable) => number) =>
      near.reduce((sum, one) => sum + skill(one), 0) / near.length;
    return withSkills(
      pair,
      mean(({ merit }) => merit.skill),
      mean(({ plain }) => plain.merit.skill),
    );
  });
}

function withSkills(one: TunedVariable, skill: number, plainSkill: number): TunedVariable {
  const { merit, plain } = one;
  return {
    ...one,
    merit: { ...merit, skill },
    plain: { ...plain, merit: { ...plain.merit, skill: plainSkill } },
  };
}

/** A manner of a pair, evened out by as much as the usual manner of the pair was. */
function shifted(one: TunedVariable, raw: TunedVariable, evened: TunedVariable): TunedVariable {
  return withSkills(
    one,
    one.merit.skill + evened.merit.skill - raw.merit.skill,
    one.plain.merit.skill + evened.plain.merit.skill - raw.plain.merit.skill,
  );
}

function shortList(pairs: readonly TunedVariable[], ceiling: Ceiling | null): TunedVariable[] {
  const left = [...pairs];
  const list: TunedVariable[] = [];
  while (left.length > 0 && list.length < REFINED) {
    const { delays, rank } = bestTuned(left, ceiling)!;
    const place = left.findIndex((one) => one.delays === delays && one.rank === rank);
    list.push(...left.splice(place, 1));
  }
  return list;
}

/** One entry a window and rank: the best manner of it. */
function bestOfPairs(
  pairs: readonly TunedVariable[],
  refined: readonly TunedVariable[],
  ceiling: Ceiling | null,
): TunedVariable[] {
  return pairs.map((pair) => {
    const same = refined.filter(({ delays, rank }) => delays === pair.delays && rank === pair.rank);
    return bestTuned(same.length === 0 ? [pair] : same, ceiling)!;
  });
}

function toTriedSetting(
  { delays, rank, signal, merit, point }: TunedVariable,
  interval: number,
): TriedSetting {
  const { skill, detection, cameTrue } = merit;
  const { threshold } = point.rule;
  return {
    delays,
    window: delays * interval,
    rank,
    variable: signal.name,
    skill,
    detection,
    cameTrue,
    threshold,
  };
}

/**
 * The variable that was asked for, or the better of the two.
 *
 * @throws InputError NOTHING_TO_WARN_OF when no switch of the tuning part could have been warned of
 */
export function chooseVariable(
  { forcing, levels }: SearchedVariables,
  variable: RehearsalRequest['variable'],
  ceiling: Ceiling | null,
): TunedVariable {
  const candidates = [
    ...(variable === 'level' || forcing === null ? [] : [forcing]),
    ...(variable === 'forcing' ? [] : levels),
  ];
  // without a ceiling each candidate says itself whether it is weak
  const strong = candidates.filter(({ weak }) => !weak);
  const eligible = ceiling === null && strong.length > 0 ? strong : candidates;
  const best = choosePoint(
    eligible.map(({ merit }) => merit),
    ceiling ?? PLAIN,
  );
  const chosen = eligible.find(({ merit }) => merit === best?.point);
  if (chosen !== undefined) return chosen;
  throw nothingToWarnOf();
}

/** The fault NOTHING_TO_WARN_OF: every switch of the tuning part is blind. */
export const nothingToWarnOf = (): InputError =>
  new InputError(
    'NOTHING_TO_WARN_OF',
    'no switch of the tuning part could have been warned of (no full window lies before it in time); give longer recordings with fewer gaps, another rule for the switch, or a longer horizon',
  );
