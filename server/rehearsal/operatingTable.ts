import {
  type OperatingRow,
  type OperatingTable,
  SWITCH_OUTCOMES,
  WARNING_OUTCOMES,
} from '../../shared-types/rehearsal.ts';
import type { WatchRule } from '../../shared-types/watch.ts';
import { type GradingSpans, gradeSwitch, gradeWarning } from '../watch/grading.ts';
import { steppedRule } from '../watch/watchRule.ts';
import { sightOf } from './cut.ts';
import type { GriddedRecording } from './gridded.ts';
import { type PreparedScoring, prepareScoring, type RecordToScore, scoreRecords, stepOf } from './score.ts';
import { type Trace, warningsInto } from './trace.ts';

/** What a table is made of. */
export interface TableTask {
  variable: string;
  /** one a row, in ascending strictness */
  rules: readonly WatchRule[];
  recordings: readonly GriddedRecording[];
  traces: readonly Trace[];
  /** seconds from which each recording is scored; infinite: none of it */
  scoredFrom: readonly number[];
  spans: GradingSpans;
  /** seconds, taken off the leads */
  delay: number;
}

/** Everything that follows a threshold, for every threshold; no p-values. */
export function operatingTable(task: TableTask): OperatingTable {
  const records = task.recordings.map((recording, i) =>
    recordOfTrace(recording, task.traces[i]!, task.scoredFrom[i]!),
  );
  const judged = records.filter(isJudged);
  const prepared = prepareScoring(judged, task.spans);
  const out = new Int32Array(Math.max(...task.traces.map(({ value }) => value.length)));
  return {
    variable: task.variable,
    rows: task.rules.map((rule) => {
      records.forEach((record, i) => {
        record.warnings = warningTimes(task.traces[i]!, rule, task.spans.interval, out);
      });
      return rowOf(rule, records, judged, prepared, task);
    }),
  };
}

/** Whether some of a record is scored. */
export const isJudged = ({ scoredFrom, end }: RecordToScore): boolean => scoredFrom <= end;

/** A recording as watching a trace sees it, without warnings yet. */
export function recordOfTrace(recording: GriddedRecording, trace: Trace, scoredFrom: number): RecordToScore {
  const { start, end, known, switches, unseen } = recording;
  return {
    start,
    end,
    known,
    scoredFrom,
    warnings: [],
    switches: switches.map(({ at }) => at),
    sight: sightOf(recording, trace),
    unseen,
  };
}

/** `at` of the warnings that a rule issues over a trace, seconds. */
export function warningTimes(trace: Trace, rule: WatchRule, interval: number, out: Int32Array): number[] {
  const size = warningsInto(trace, trace.value.length, steppedRule(rule, interval), out);
  return Array.from(out.subarray(0, size), (index) => trace.at[index]!);
}

function rowOf(
  { threshold, rearm }: WatchRule,
  records: readonly RecordToScore[],
  judged: readonly RecordToScore[],
  prepared: PreparedScoring,
  { spans, delay }: TableTask,
): OperatingRow {
  const leads: number[] = [];
  const switches = records.flatMap((record) => {
    const from = stepOf(record.scoredFrom, record, spans.interval);
    return record.switches.map((e) => {
      const { outcome, lead } = gradeSwitch(record, e, spans);
      if (lead !== null && stepOf(e, record, spans.interval) >= from) leads.push(lead - delay);
      return SWITCH_OUTCOMES.indexOf(outcome);
    });
  });
  return {
    threshold,
    rearm,
    score: scoreRecords(judged, spans, { uniform: null, delay }, prepared),
    leads: Float64Array.from(leads),
    recording: Uint16Array.from(records.flatMap(({ warnings }, i) => warnings.map(() => i))),
    at: Float64Array.from(records.flatMap(({ warnings }) => warnings as number[])),
    outcome: Uint8Array.from(
      records.flatMap((record) =>
        record.warnings.map((_, index) =>
          WARNING_OUTCOMES.indexOf(gradeWarning(record, index, spans, record.known).outcome),
        ),
      ),
    ),
    switches: Uint8Array.from(switches),
  };
}
