import type { Score } from '../../shared-types/score.ts';
import type { SwitchOutcome, WarningOutcome } from '../../shared-types/warning.ts';
import { type GradingRecord, type GradingSpans, gradeSwitch, gradeWarning } from '../watch/grading.ts';
import { randomMedianLead, shiftPValue } from './chance.ts';
import { garwoodInterval, wilsonInterval } from './intervals.ts';
import { perfectSkill, skillShareOf } from './perfect.ts';
import { addTally, emptyTally, type Steps, tauOf } from './tally.ts';

/** What a watch said of one recording, and what happened. Times are channel time in seconds. */
export interface RecordToScore extends GradingRecord {
  /** first and last grid step */
  start: number;
  end: number;
  /** time up to which every switch is known, ≤ end: one may lie beyond it that is not confirmed yet */
  known: number;
  /** switches and warnings from here on are counted; those before it still cover and repeat */
  scoredFrom: number;
}

/** How a score is to be made. */
export interface ScoreOptions {
  /** seeded, in [0, 1), for the p-value's shifts; null: no p-value */
  uniform: (() => number) | null;
  /** seconds from `at` until a person or an output has the warning; taken off every lead */
  delay?: number;
}

/** What does not depend on the warnings, made once for many scores of the same records. */
export interface PreparedScoring {
  stretches: Steps[];
  /** the perfect warner's skill; null where no switch counts */
  perfect: number | null;
}

/** Readies records for being scored with many sets of warnings. */
export function prepareScoring(records: readonly RecordToScore[], spans: GradingSpans): PreparedScoring {
  const stretches = records.map((record) => toStretch(record, spans));
  return { stretches, perfect: perfectSkill(stretches) };
}

/**
 * The score of a watch over recordings, from which spans never cross into each other.
 *
 * @param spans    least lead, horizon and interval; the same for all recordings
 * @param prepared made of the same records, when several scores are wanted
 */
export function scoreRecords(
  records: readonly RecordToScore[],
  spans: GradingSpans,
  options: ScoreOptions,
  prepared = prepareScoring(records, spans),
): Score {
  const { stretches } = prepared;
  const warnings = records.map((record) => stepsOf(record.warnings, record, spans.interval));
  const { switches, issued, leads } = countOutcomes(records, spans);
  const tally = emptyTally();
  stretches.forEach((steps, i) => {
    addTally(steps, warnings[i]!, warnings[i]!.length, new Int32Array(steps.switches.length), tally);
  });
  const counted = switches.warned + switches.late + switches.missed;
  const settled = issued.true + issued.late + issued.false;
  const watchedSeconds = tally.watched * spans.interval;
  const tau = tauOf(tally);
  const skill = counted === 0 ? null : switches.warned / counted - tau;
  const random = randomMedianLead(issued.total, tally.watched, spans.leastLead, spans.horizon);
  const delay = options.delay ?? 0;
  return {
    switches,
    warnings: issued,
    detection: wilsonInterval(switches.warned, counted),
    cameTrue: wilsonInterval(issued.true, settled),
    falseRatio: wilsonInterval(issued.false, settled),
    falsePerHour: garwoodInterval(issued.false, watchedSeconds / 3600),
    lead: {
      median: quantile(leads, 0.5, delay),
      p10: quantile(leads, 0.1, delay),
      p90: quantile(leads, 0.9, delay),
      random: random === null ? null : random * spans.interval - delay,
    },
    tau,
    skill,
    skillShare: skillShareOf(skill, prepared.perfect),
    pValue: options.uniform === null ? null : shiftPValue(stretches, warnings, options.uniform),
    watchedSeconds,
  };
}

function countOutcomes(records: readonly RecordToScore[], spans: GradingSpans) {
  const switches = { total: 0, warned: 0, late: 0, missed: 0, blind: 0 };
  const issued = { total: 0, true: 0, repeat: 0, late: 0, false: 0, open: 0, unseen: 0, acted: 0 };
  const leads: number[] = [];
  for (const record of records) {
    const from = stepOf(record.scoredFrom, record, spans.interval);
    for (const e of record.switches) {
      if (stepOf(e, record, spans.interval) < from) continue;
      const { outcome, lead } = gradeSwitch(record, e, spans);
      switches.total++;
      if (outcome !== 'pending') switches[outcome satisfies Exclude<SwitchOutcome, 'pending'>]++;
      if (lead !== null) leads.push(lead);
    }
    record.warnings.forEach((a, index) => {
      if (stepOf(a, record, spans.interval) < from) return;
      const { outcome } = gradeWarning(record, index, spans, record.known);
      issued.total++;
      issued[outcome satisfies WarningOutcome]++;
    });
  }
  leads.sort((a, b) => a - b);
  return { switches, issued, leads };
}

/** Whole grid steps from the recording's first one. */
export const stepOf = (time: number, record: { start: number }, interval: number): number =>
  Math.round((time - record.start) / interval);

function stepsOf(times: readonly number[], record: RecordToScore, interval: number): Int32Array {
  return Int32Array.from(times, (time) => stepOf(time, record, interval));
}

/** A recording in whole grid steps. */
export function toStretch(record: RecordToScore, spans: GradingSpans): Steps {
  const { interval, leastLead, horizon } = spans;
  const count = stepOf(record.end, record, interval) + 1;
  const watchedBefore = new Int32Array(count + 1);
  for (const { from, to } of record.sight) {
    const last = Math.min(count - 1, stepOf(to, record, interval));
    for (let i = Math.max(0, stepOf(from, record, interval)); i <= last; i++) watchedBefore[i + 1] = 1;
  }
  for (let i = 0; i < count; i++) watchedBefore[i + 1] = watchedBefore[i + 1]! + watchedBefore[i]!;
  return {
    leastLead,
    horizon,
    count,
    known: stepOf(record.known, record, interval),
    scoredFrom: Math.max(0, stepOf(record.scoredFrom, record, interval)),
    watchedBefore,
    switches: stepsOf(record.switches, record, interval),
    unseen: Float64Array.from(
      record.unseen.flatMap(({ from, to }) => [
        (from - record.start) / interval,
        (to - record.start) / interval,
      ]),
    ),
  };
}

/**
 * Quantile by linear interpolation between order statistics; null of nothing.
 *
 * @param sorted ascending
 * @see Hyndman, Fan 1996, The American Statistician 50, p. 361 (definition 7)
 */
function quantile(sorted: readonly number[], share: number, delay: number): number | null {
  if (sorted.length === 0) return null;
  const place = share * (sorted.length - 1);
  const below = Math.floor(place);
  const above = Math.min(sorted.length - 1, below + 1);
  return sorted[below]! + (place - below) * (sorted[above]! - sorted[below]!) - delay;
}
