import type { Score } from '../../shared-types/score.ts';
import type { SwitchOutcome, WarningOutcome } from '../../shared-types/warning.ts';
import { InputError } from '../signal/inputError.ts';
import { type GradingSpans, gradeSwitch, gradeWarning, type Stretch } from '../watch/grading.ts';
import type { ConfirmedSwitch } from '../watch/regimeRule.ts';
import type { Happening, Steps, WatchSettings } from '../watch/types.ts';
import { createWatch } from '../watch/watch.ts';
import { toSteps } from '../watch/watchRule.ts';
import { findSwitches, regimeChannelOf, seriesOf } from './gridded.ts';
import { judgedFromTimes, scoredFromTime } from './parts.ts';
import { framesOf, type RecordedSeries } from './playback.ts';
import { type RecordToScore, scoreRecords } from './score.ts';

/** How a rehearsal is to be run. */
export interface RehearsalOptions {
  /** share of the time (with four or more recordings: of the recordings) that is not judged */
  tunePart: number;
  /** seconds from `at` until a person or an output has the warning */
  delay: number;
  /** seeded, in [0, 1), for the p-value; null: none */
  uniform: (() => number) | null;
  /** samples a frame; makes no difference to what comes out */
  frame?: number;
}

/** Which part of a rehearsal something belongs to: what settings may be chosen on, or what is scored. */
export type Part = 'tuning' | 'judged';

/** A switch and what became of it. Times are channel time in seconds. */
export interface RehearsedSwitch {
  recording: number;
  at: number;
  confirmedAt: number;
  outcome: Exclude<SwitchOutcome, 'pending'>;
  lead: number | null;
  part: Part;
}

/** A warning and what became of it; it speaks for (from, to]. */
export interface RehearsedWarning {
  recording: number;
  at: number;
  from: number;
  to: number;
  value: number;
  outcome: WarningOutcome;
  switchAt: number | null;
  lead: number | null;
  part: Part;
}

/** What a watch would have said of recordings. */
export interface Rehearsal {
  switches: RehearsedSwitch[];
  warnings: RehearsedWarning[];
  /** of the judged part */
  score: Score;
  /** the time at which each recording's judged part begins */
  judgedFrom: number[];
}

/**
 * Feeds recordings to a live watch as frames and scores what it says. Every recording meets a watch that knows
 * nothing of the one before.
 *
 * @param recordings the channels of each, by the names the watch asks for
 * @throws InputError when the settings have no watch rule or no regime rule, or a channel is missing
 */
export function rehearse(
  settings: WatchSettings,
  recordings: readonly (readonly RecordedSeries[])[],
  options: RehearsalOptions,
): Rehearsal {
  const { rule, model } = settings;
  if (rule === null || settings.regime === null) {
    throw new InputError(
      'NO_RULE',
      `the model ${model.name} has no ${rule === null ? 'watch rule' : 'regime rule'}, so nothing can be scored; ` +
        'give --regime, --least-lead, --horizon and --threshold, or fit it with them',
    );
  }
  const { interval } = model;
  const spans = {
    interval,
    leastLead: toSteps(rule.leastLead, interval),
    horizon: toSteps(rule.horizon, interval),
  };
  const played = recordings.map((series) => play(settings, series, options.frame));
  const judgedFrom = judgedFromTimes(
    played.map(({ record }) => ({ ...record, interval })),
    options.tunePart,
  );
  played.forEach(({ record }, i) => {
    record.scoredFrom = scoredFromTime(record, judgedFrom[i]!, spans);
  });
  const partOf = (recording: number, at: number): Part =>
    at < judgedFrom[recording]! - interval / 2 ? 'tuning' : 'judged';
  return {
    switches: played.flatMap((one, i) => gradedSwitches(one, i, spans, partOf)),
    warnings: played.flatMap((one, i) => gradedWarnings(one, i, spans, partOf)),
    score: scoreRecords(
      played.filter((_, i) => judgedFrom[i]! <= played[i]!.record.end).map(({ record }) => record),
      spans,
      { uniform: options.uniform, delay: options.delay },
    ),
    judgedFrom,
  };
}

type WarningHappening = Extract<Happening, { kind: 'warning' }>;

interface Played {
  record: RecordToScore;
  warnings: WarningHappening[];
  switches: ConfirmedSwitch[];
}

function play(settings: WatchSettings, series: readonly RecordedSeries[], frame?: number): Played {
  const { model, regime, channels } = settings;
  const watch = createWatch({
    ...settings,
    regimeChannel: regimeChannelOf(regime!, settings.regimeChannel, channels),
  });
  const warnings: WarningHappening[] = [];
  const seen = { start: Number.NaN, end: Number.NaN, sight: [] as Stretch[], full: false };
  const wanted = watch.wants().map((channel) => seriesOf(series, channel));
  for (const one of framesOf(wanted, frame)) {
    const happenings: Happening[] = [];
    noteSteps(watch.push(one, happenings), seen, model.interval);
    for (const happening of happenings) if (happening.kind === 'warning') warnings.push(happening);
  }
  const { start, end, sight } = seen;
  const regimeSeries = seriesOf(series, regimeChannelOf(regime!, settings.regimeChannel, channels));
  const found = findSwitches(regimeSeries, { ...model, regime: regime! });
  const half = model.interval / 2;
  const switches = found.switches.filter(({ at }) => at >= start - half && at <= end + half);
  return {
    warnings,
    switches,
    record: {
      start,
      end,
      known: Math.min(found.known, end),
      scoredFrom: start,
      warnings: warnings.map(({ at }) => at),
      switches: switches.map(({ at }) => at),
      sight,
      unseen: found.unseen,
    },
  };
}

function noteSteps(
  { count, time, value }: Steps,
  seen: { start: number; end: number; sight: Stretch[]; full: boolean },
  interval: number,
): void {
  for (let i = 0; i < count; i++) {
    const at = time[i]!;
    const full = !Number.isNaN(value[i]!);
    const follows = seen.full && at - seen.end < 1.5 * interval;
    if (full && follows) seen.sight.at(-1)!.to = at;
    else if (full) seen.sight.push({ from: at, to: at });
    if (Number.isNaN(seen.start)) seen.start = at;
    seen.end = at;
    seen.full = full;
  }
}

function gradedSwitches(
  { switches, record }: Played,
  recording: number,
  spans: GradingSpans,
  partOf: (recording: number, at: number) => Part,
): RehearsedSwitch[] {
  return switches.map(({ at, confirmedAt }) => {
    const { outcome, lead } = gradeSwitch(record, at, spans);
    return {
      recording,
      at,
      confirmedAt,
      outcome: outcome as RehearsedSwitch['outcome'],
      lead,
      part: partOf(recording, at),
    };
  });
}

function gradedWarnings(
  { warnings, record }: Played,
  recording: number,
  spans: GradingSpans,
  partOf: (recording: number, at: number) => Part,
): RehearsedWarning[] {
  return warnings.map(({ at, from, to, value }, index) => {
    const grade = gradeWarning(record, index, spans, record.known);
    return { recording, at, from, to, value, ...grade, part: partOf(recording, at) };
  });
}
