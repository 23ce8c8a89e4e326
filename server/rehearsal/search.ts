import type { Model } from '../../shared-types/model.ts';
import type { Score } from '../../shared-types/score.ts';
import type { RegimeRule, WatchRule } from '../../shared-types/watch.ts';
import { fitModel } from '../model/fit.ts';
import { InputError } from '../signal/inputError.ts';
import { steppedRule } from '../watch/watchRule.ts';
import { cutBefore, sightOf, spansOf, stepsOfTrace } from './cut.ts';
import { type GriddedRecording, gridRecording } from './gridded.ts';
import { judgedFromTimes, scoredFromTime } from './parts.ts';
import type { RecordedSeries } from './playback.ts';
import { type RecordToScore, scoreRecords } from './score.ts';
import {
  type Ceiling,
  choosePoint,
  createTried,
  type OperatingPoint,
  type RuleWishes,
  sweepThresholds,
  type Tried,
} from './threshold.ts';
import { type Trace, traceOf, warningsInto } from './trace.ts';

/** What is to be warned of, and how early. */
export interface RegimeWishes extends RuleWishes {
  regime: RegimeRule;
  regimeChannel: string | null;
}

/** A rule chosen for a model. */
export interface ChosenRule {
  rule: WatchRule;
  /** how it does on the recordings it was chosen on */
  point: OperatingPoint;
  /** nothing was within the ceiling, or no threshold had half of its warnings come true */
  weak: boolean;
}

/**
 * Chooses the threshold on a model's forcing by what it does on recordings, all of which may be used for choosing.
 *
 * @param recordings the channels of each recording; those of the model by name
 * @returns null when no switch in them could have been warned of
 */
export function chooseThreshold(
  model: Model,
  recordings: readonly (readonly RecordedSeries[])[],
  wishes: RegimeWishes,
  ceiling: Ceiling | null = null,
): ChosenRule | null {
  const { interval, gapIntervals } = model;
  const channels = model.channels.map(({ channel }) => channel);
  const settings = { ...wishes, channels, interval, gapIntervals };
  const tried = recordings.map((series) => {
    const gridded = gridRecording(series, settings);
    return triedOf(model, gridded, wishes);
  });
  const chosen = choosePoint(sweepThresholds(tried, wishes, interval), ceiling);
  return chosen === null ? null : { rule: chosen.point.rule, ...chosen };
}

/** What a search over windows and ranks works on. */
export interface SearchTask {
  name: string;
  channels: { channel: string; unit: string }[];
  recordings: readonly (readonly RecordedSeries[])[];
  interval: number;
  gapIntervals: number;
  center: 'mean' | 'none';
  wishes: RegimeWishes;
  ceiling: Ceiling | null;
  /** the windows and ranks to try */
  pairs: readonly { delays: number; rank: number }[];
  /** share of the time (with four or more recordings: of the recordings) used for choosing */
  tunePart: number;
  /** seeded, in [0, 1), for the p-value; null: none */
  uniform: (() => number) | null;
}

/** One window and rank with the best rule found for it on the tuning part. */
export interface TriedPair {
  delays: number;
  rank: number;
  model: Model;
  point: OperatingPoint;
  weak: boolean;
}

/** What a search found. `model` carries the chosen rules and the score of the judged part. */
export interface Found {
  model: Model;
  chosen: TriedPair;
  score: Score;
  pairs: TriedPair[];
  /** settings tried: windows × ranks × thresholds */
  tried: number;
}

/**
 * Chooses window, rank and threshold: each pair is fitted on the tuning part, its forcing swept there, the best by
 * the rule of choice taken and scored on the rest.
 *
 * @throws InputError when no switch on the tuning part could have been warned of
 */
export function chooseSettings(task: SearchTask): Found {
  const parted = partRecordings(task);
  const pairs: TriedPair[] = [];
  let tried = 0;
  for (const { delays, rank } of task.pairs) {
    const model = fitTuningPart(task, parted, delays, rank);
    const points = sweepModel(task, parted, model);
    tried += points.length;
    const best = choosePoint(points, task.ceiling);
    if (best !== null) pairs.push({ delays, rank, model, ...best });
  }
  const chosen = bestPair(pairs, task.ceiling);
  const score = judge(task, parted, chosen.model, chosen.point.rule);
  const { regime, regimeChannel } = task.wishes;
  const model = { ...chosen.model, rule: chosen.point.rule, regime, regimeChannel, score };
  return { model, chosen, score, pairs, tried };
}

/** Fits one window and rank on the tuning part, chooses its threshold there and scores it on the rest. */
export function judgePair(task: SearchTask, delays: number, rank: number): Found {
  return chooseSettings({ ...task, pairs: [{ delays, rank }] });
}

interface Parted {
  gridded: GriddedRecording;
  /** null: none of it is for tuning */
  tuning: GriddedRecording | null;
  /** seconds */
  judgedFrom: number;
}

function partRecordings(task: SearchTask): Parted[] {
  const { recordings, tunePart, wishes, interval, gapIntervals } = task;
  const channels = task.channels.map(({ channel }) => channel);
  const gridded = recordings.map((series) =>
    gridRecording(series, { ...wishes, channels, interval, gapIntervals }),
  );
  const judgedFrom = judgedFromTimes(gridded, tunePart);
  return gridded.map((one, i) => ({
    gridded: one,
    tuning: cutBefore(one, judgedFrom[i]!),
    judgedFrom: judgedFrom[i]!,
  }));
}

function fitTuningPart(task: SearchTask, parted: readonly Parted[], delays: number, rank: number): Model {
  const runs = parted.flatMap(({ tuning }) => tuning?.runs.map(({ values }) => values) ?? []);
  const { name, channels, center, gapIntervals } = task;
  const long = runs.filter((run) => run[0]!.length >= delays);
  return fitModel(long, task.interval, { name, channels, delays, rank, center, gapIntervals });
}

function sweepModel(task: SearchTask, parted: readonly Parted[], model: Model): OperatingPoint[] {
  const tried = parted.flatMap(({ tuning }) =>
    tuning === null ? [] : [triedOf(model, tuning, task.wishes)],
  );
  return sweepThresholds(tried, task.wishes, task.interval);
}

function triedOf(model: Model, gridded: GriddedRecording, wishes: RuleWishes): Tried {
  const trace = traceOf(model, gridded, 'forcing');
  return createTried(trace, stepsOfTrace(gridded, trace, spansOf(wishes, gridded.interval)));
}

/** Scores a rule on the judged parts; what went before still covers and repeats. */
function judge(task: SearchTask, parted: readonly Parted[], model: Model, rule: WatchRule): Score {
  const { interval, uniform } = task;
  const spans = spansOf(task.wishes, interval);
  const records = parted
    .filter(({ gridded, judgedFrom }) => judgedFrom <= gridded.end)
    .map(({ gridded, judgedFrom }) => {
      const from = scoredFromTime(gridded, judgedFrom, spans);
      return recordOf(gridded, traceOf(model, gridded, rule.variable), rule, from);
    });
  return scoreRecords(records, spans, { uniform });
}

/** What a rule would have said of a whole recording, ready to be scored from a time on. */
export function recordOf(
  gridded: GriddedRecording,
  trace: Trace,
  rule: WatchRule,
  scoredFrom: number,
): RecordToScore {
  const { start, end, known, interval } = gridded;
  const out = new Int32Array(trace.value.length);
  const size = warningsInto(trace, trace.value.length, steppedRule(rule, interval), out);
  return {
    start,
    end,
    known,
    scoredFrom,
    warnings: Array.from(out.subarray(0, size), (index) => trace.at[index]!),
    switches: gridded.switches.map(({ at }) => at),
    sight: sightOf(gridded, trace),
    unseen: gridded.unseen,
  };
}

function bestPair(pairs: readonly TriedPair[], ceiling: Ceiling | null): TriedPair {
  const best = choosePoint(
    pairs.map(({ point }) => point),
    ceiling,
  );
  if (best === null) {
    throw new InputError(
      'NOTHING_TO_WARN_OF',
      'no switch on the tuning part could have been warned of; give longer recordings, another rule for the switch, or a longer horizon',
    );
  }
  return pairs.find(({ point }) => point === best.point)!;
}
