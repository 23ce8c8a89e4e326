import type { Model } from '../../shared-types/model.ts';
import type { OperatingTable } from '../../shared-types/rehearsal.ts';
import type { WatchRule } from '../../shared-types/watch.ts';
import { createRandom } from '../signal/random.ts';
import { ruleOfManner } from './manner.ts';
import { isJudged, operatingTable, recordOfTrace, warningTimes } from './operatingTable.ts';
import type { Prepared } from './prepare.ts';
import { prepareScoring, scoreRecords } from './score.ts';
import { ROWS, type Settled } from './settle.ts';
import type { RehearsalTask } from './task.ts';
import { choosePoint } from './threshold.ts';
import type { Trace } from './trace.ts';
import { type Ground, sweep, thresholdsOf, triedOn } from './tune.ts';

/** The score of the chosen rule on the judged part, with its p-value. */
export function scoreChosen(
  { request }: RehearsalTask,
  { recordings, scoredFrom, spans }: Prepared,
  traces: readonly Trace[],
  rule: WatchRule,
) {
  const out = new Int32Array(Math.max(...traces.map(({ value }) => value.length)));
  const records = recordings
    .map((one, i) => ({
      ...recordOfTrace(one, traces[i]!, scoredFrom[i]!),
      warnings: warningTimes(traces[i]!, rule, spans.interval, out),
    }))
    .filter(isJudged);
  return scoreRecords(records, spans, {
    uniform: createRandom(request.seed).uniform,
    delay: request.delay,
  });
}

/** Skill of the perfect warner on the judged part. */
export function perfectOf(
  { recordings, scoredFrom, spans }: Prepared,
  traces: readonly Trace[],
): number | null {
  const records = recordings.map((one, i) => recordOfTrace(one, traces[i]!, scoredFrom[i]!)).filter(isJudged);
  return prepareScoring(records, spans).perfect;
}

/** The operating table of the chosen model and manner, with the chosen row and that of the plain maximum of skill. */
export function tableOf(
  { request }: RehearsalTask,
  { recordings, scoredFrom, spans }: Prepared,
  ground: Ground,
  { chosen, rule }: Settled,
  traces: readonly Trace[],
): { table: OperatingTable; chosenRow: number; plainRow: number } {
  const { signal, manner } = chosen;
  const tried = triedOn(ground, signal);
  const rules = new Map<number, WatchRule>();
  for (const threshold of thresholdsOf(signal, tried, ROWS)) {
    const one = ruleOfManner(manner, request, signal.variable, signal.direction, threshold);
    if (one !== null) rules.set(threshold, one);
  }
  rules.set(rule.threshold, rule);
  const sign = signal.direction === 'falling' ? -1 : 1;
  const sorted = [...rules.values()].sort((a, b) => sign * (a.threshold - b.threshold));
  const points = sweep(
    ground,
    tried,
    signal,
    manner,
    sorted.map(({ threshold }) => threshold),
  );
  const plain = choosePoint(points, { falsePerHour: null, cameTrue: 0 });
  const rowOf = (threshold: number) => sorted.findIndex((one) => one.threshold === threshold);
  return {
    table: operatingTable({
      variable: signal.name,
      rules: sorted,
      recordings,
      traces,
      scoredFrom,
      spans,
      delay: request.delay,
    }),
    chosenRow: rowOf(rule.threshold),
    plainRow: plain === null ? rowOf(rule.threshold) : rowOf(plain.point.rule.threshold),
  };
}

/** What of a table a model file carries. */
export function compactOf({ rows }: OperatingTable): NonNullable<Model['operating']> {
  return rows.map(({ threshold, rearm, score }) => ({
    threshold,
    rearm,
    falsePerHour: score.falsePerHour.value,
    detection: score.detection.value,
    cameTrue: score.cameTrue.value,
  }));
}
