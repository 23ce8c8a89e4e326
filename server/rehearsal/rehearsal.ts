import type { Model } from '../../shared-types/model.ts';
import type { RehearsalResult } from '../../shared-types/rehearsal.ts';
import { modelToJson } from '../model/modelFile.ts';
import { InputError } from '../signal/inputError.ts';
import { createRandom } from '../signal/random.ts';
import { tuneBaselines } from './baselineContenders.ts';
import { modelOf } from './chooseSettings.ts';
import { compactOf, perfectOf, scoreChosen, tableOf } from './chosenTable.ts';
import { judgeTuned, type Verdictable } from './judge.ts';
import { perfectSkill } from './perfect.ts';
import { type Prepared, prepareTask } from './prepare.ts';
import { overlapsJudged } from './provenance.ts';
import { contenderOf, sentenceOf, watchedWords } from './rehearsalWords.ts';
import { highest, leftOutByCeiling, rivalOf } from './rival.ts';
import { givenModel, type Settled, searchSettings, tuningGround } from './settle.ts';
import type { RehearsalTask } from './task.ts';
import { traceOf } from './trace.ts';
import { createGround, freeGround, type Ground, type Tuned, triedOn } from './tune.ts';
import { levelSignals } from './variables.ts';
import { verdictOf } from './verdict.ts';
import { spanWords } from './words.ts';

export type { RehearsalTask, TaskRecording, TaskSeries } from './task.ts';

type Progress = (done: number, doing: string) => void;

/**
 * Rehearses: settings are searched for on the tuning part, judged on the rest beside plain baselines, and summed up in
 * a verdict. `seconds` of the result is 0: who calls knows the clock.
 *
 * @param progress told the share of the work that is done, 0..1, and in words what is being done
 * @throws InputError in one sentence when the recordings and the request do not go together
 */
export function runRehearsal(task: RehearsalTask, progress: Progress = () => {}): RehearsalResult {
  progress(0, 'putting the recordings on their grid');
  const prepared = prepareTask(task);
  const runs = prepared.tuning.flatMap((one) => one.runs.map(({ values }) => values));
  const ground = tuningGround(task, prepared);
  checkOverlap(prepared, ground);
  const searched =
    task.model == null
      ? searchSettings(task, prepared, ground, runs, { beside: true, progress: within(progress, 0.05, 0.6) })
      : givenModel(task.model, ground);
  const baselines = tuneBaselines(prepared, freeGround(ground), runs, within(progress, 0.6, 0.75));
  progress(0.75, 'judging the variables and the baselines');
  return judgeAndReport(task, prepared, ground, searched, baselines, within(progress, 0.75, 1));
}

function within(progress: Progress, from: number, to: number): Progress {
  return (done, doing) => progress(from + done * (to - from), doing);
}

/** Below this skill of a perfect warner every span covers some switch. */
const CROWDED = 0.05;

function checkOverlap({ spans, regime }: Prepared, ground: Ground): void {
  const channels = ground.recordings[0]!.runs[0]!.values.length;
  const [anything] = levelSignals(levelOnly(channels));
  const steps = triedOn(ground, anything!).map((one) => one.steps);
  const perfect = perfectSkill(steps);
  if (perfect === null || perfect >= CROWDED) return;
  const { horizon, interval } = spans;
  throw new InputError(
    'EVENTS_OVERLAP',
    `the ${regime.kind} rule finds switches so close together that the spans of their warnings overlap all the time (horizon ${spanWords(horizon * interval)}), expected a horizon shorter than the usual time between switches; shorten the horizon, or choose a rule with fewer switches`,
  );
}

/** A stand-in for a model of which only the level is watched, with a window of one sample. */
const levelOnly = (channels: number) => ({
  coordinates: new Float64Array(channels),
  delays: 1,
  rank: 1,
  channels: Array.from({ length: channels }, () => ({ mean: 0 })),
});

function judgeAndReport(
  task: RehearsalTask,
  prepared: Prepared,
  ground: Ground,
  settled: Settled,
  baselines: readonly Tuned[],
  progress: Progress,
): RehearsalResult {
  const { request } = task;
  const { recordings, judgedFrom } = prepared;
  const { chosen, rule } = settled;
  const judgedGround = judgingGround(prepared, ground);
  const judged = [chosen, ...settled.others, ...baselines].map((one, i, { length }) => {
    progress((0.6 * i) / length, `judging: ${one.signal.name}`);
    return judgeTuned(judgedGround, one);
  });
  const traces = recordings.map((one) => traceOf(settled.model, one, rule.variable));
  const score = scoreChosen(task, prepared, traces, rule);
  progress(0.65, 'the table of operating points');
  const { table, chosenRow, plainRow } = tableOf(task, prepared, ground, settled, traces);
  table.rows[chosenRow]!.score = score;
  const model: Model = { ...modelOf(task, prepared, settled, score), operating: compactOf(table) };
  const word = model.switchWord;
  const unit = prepared.channels[0]!.unit;
  const plainOnes = judged.slice(1).filter((one) => one.tuned.signal.name !== 'forcing');
  const { uniform } = createRandom(request.seed + 1);
  const rival = rivalOf(judged[0]!, plainOnes, request.ceiling, uniform);
  const fittedOnJudged = task.model != null && overlapsJudged(task.model, task, prepared);
  const watchedHours =
    recordings.reduce((sum, { start, end }) => sum + end - start + prepared.interval, 0) / 3600;
  const verdict = verdictOf({
    score,
    variable: chosen.signal.name,
    ceiling: request.ceiling,
    rival: rival === null ? null : { name: rival.judged.tuned.signal.name, ...rival.difference },
    level: namedSkill(highest(plainOnes.filter(isLevel))),
    outside: namedSkill(leftOutByCeiling(judged[0]!, plainOnes, request.ceiling)),
    fittedOnJudged,
    perfect: perfectOf(prepared, traces),
    levelChosenFreely: request.variable === 'best' && task.model == null,
    word,
    perHour: recordings.reduce((sum, { switches }) => sum + switches.length, 0) / watchedHours,
    judgedShare: score.watchedSeconds / 3600 / watchedHours,
  });
  progress(1, 'done');
  return {
    request,
    sentence: sentenceOf(watchedWords(chosen, unit), score, word, rival?.judged ?? null, request.delay),
    verdict,
    settings: {
      ...rule,
      delays: model.delays,
      rank: model.rank,
      interval: model.interval,
      window: model.delays * model.interval,
    },
    score,
    weak: settled.weak,
    fittedOnJudged,
    contenders: judged.map((one) => contenderOf(one, isVariable(one, chosen, request.variable), unit)),
    pairs: settled.pairs,
    tried: settled.tried,
    table,
    chosenRow,
    plainRow,
    recordings: recordings.map(({ start, end, interval }, i) => ({
      name: task.recordings[i]!.name,
      from: start,
      to: end,
      judgedFrom: Math.min(judgedFrom[i]!, end + interval),
      samples: task.recordings[i]!.series.find(({ channel }) => channel === request.channels[0])!.times
        .length,
      sha256: task.recordings[i]!.sha256,
    })),
    leftOut: task.recordings.flatMap(({ leftOut }, recording) =>
      leftOut.map((one) => ({ recording, from: one.from, to: one.to, why: one.why })),
    ),
    switches: recordings.flatMap(({ switches, interval }, recording) =>
      switches.map((one) => ({
        recording,
        ...one,
        part: one.at < judgedFrom[recording]! - interval / 2 ? ('tuning' as const) : ('judged' as const),
      })),
    ),
    model: modelToJson({ ...model, verdict: { kind: verdict.kind, than: verdict.than } }),
    seconds: 0,
    program: task.program,
    at: task.at,
  };
}

const isLevel = ({ tuned }: Verdictable): boolean => tuned.signal.name.startsWith('level ');

const namedSkill = (one: Verdictable | null) =>
  one === null ? null : { name: one.tuned.signal.name, skill: one.point!.skill };

/** The forcing and the levels are variables where they were up for choice; the level is a baseline as well. */
function isVariable({ tuned }: Verdictable, chosen: Tuned, asked: string): boolean {
  const { name } = tuned.signal;
  return (
    name === 'forcing' || name === chosen.signal.name || (name.startsWith('level ') && asked !== 'forcing')
  );
}

function judgingGround({ recordings, scoredFrom }: Prepared, ground: Ground): Ground {
  const kept = [...recordings.keys()].filter((i) => scoredFrom[i]! <= recordings[i]!.end);
  return createGround(
    kept.map((i) => recordings[i]!),
    kept.map(() => []),
    kept.map((i) => scoredFrom[i]!),
    ground,
  );
}
