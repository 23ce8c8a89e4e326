import { z } from 'zod';
import { ChannelName } from './channel.ts';
import type { Score } from './score.ts';
import type { SwitchOutcome } from './warning.ts';
import type { WatchRule } from './watch.ts';

const seconds = z.number().finite().nonnegative();

/** What may be watched for: one variable, or whichever does best on the tuning part. */
export const VariableChoice = z.enum(['forcing', 'level', 'best']);
export type VariableChoice = z.infer<typeof VariableChoice>;

/** What a person agreed to; null: no ceiling of this kind. */
export const Ceiling = z.object({
  falsePerHour: z.number().finite().nonnegative().nullable().default(null),
  /** least share of warnings that must come true, 0..1 */
  cameTrue: z.number().min(0).max(1).nullable().default(null),
});
export type Ceiling = z.infer<typeof Ceiling>;

/** The operator's contract and what to rehearse it on. Times and spans are seconds. */
export const RehearsalRequest = z.object({
  /** `stored:CHANNEL`, `stored:CHANNEL/N`; the command takes files' paths as well */
  recordings: z.array(z.string().min(1)).min(1).max(100),
  /** one or several channels of one model */
  channels: z.array(ChannelName).min(1).max(16),
  /** RULE in its text form */
  regime: z.string().min(1).max(200),
  regimeChannel: ChannelName.nullable().default(null),
  leastLead: seconds,
  horizon: z.number().finite().positive(),
  ceiling: Ceiling.default({ falsePerHour: null, cameTrue: null }),
  variable: VariableChoice.default('best'),
  /** seconds from `at` until a person or an output has a warning; taken off the leads */
  delay: seconds.default(0),
  tunePart: z.number().min(0.1).max(0.9).default(0.5),
  seed: z.number().int().nonnegative().default(1),
  /** windows to try, seconds; null: chosen around the signal's own time scale */
  windows: z.array(z.number().finite().positive()).min(1).max(64).nullable().default(null),
  ranks: z.array(z.number().int().min(2).max(64)).min(1).max(16).nullable().default(null),
  /** hold these instead of searching over them; null: searched */
  threshold: z.number().finite().nullable().default(null),
  rearm: z.number().finite().nullable().default(null),
  onDelay: seconds.nullable().default(null),
  holdOff: seconds.nullable().default(null),
});
export type RehearsalRequest = z.infer<typeof RehearsalRequest>;

export type VerdictKind = 'too few events' | 'no skill' | 'no better than' | 'weak' | 'useful';

export interface Verdict {
  kind: VerdictKind;
  /** the baseline's name, for `no better than` */
  than: string | null;
  sentence: string;
}

/** The settings a rehearsal chose, as `settings` of `rehearse --json`. */
export interface ChosenSettings extends WatchRule {
  delays: number;
  rank: number;
  interval: number;
  /** window in seconds */
  window: number;
}

/** One variable or baseline, tuned on the tuning part, judged on the rest. */
export interface Contender {
  /** forcing, level rising, level falling, distance from the mean, rate of change, running variance, … */
  name: string;
  kind: 'variable' | 'baseline';
  /** words for what it was set to: "above 2.1 K" */
  settings: string;
  skill: number | null;
  detection: number | null;
  cameTrue: number | null;
  /** its trade-off on the judged part, for the curve: warnings that were false an hour against share warned */
  curve: {
    threshold: number;
    falsePerHour: number;
    detection: number;
    skill: number;
    cameTrue: number | null;
  }[];
}

/**
 * Everything that follows a threshold: one row a threshold of the chosen model and variable, ascending in strictness
 * (fewest warnings last). Made once; the page only looks up.
 */
export interface OperatingTable {
  variable: string;
  rows: OperatingRow[];
}

export interface OperatingRow {
  threshold: number;
  rearm: number;
  /** of the judged part; pValue null except in the chosen row */
  score: Score;
  /** leads of the judged warned switches, seconds, in the order of `switches` */
  leads: Float64Array;
  /** warnings over all recordings: recording index, time, outcome as index into WARNING_OUTCOMES */
  recording: Uint16Array;
  at: Float64Array;
  outcome: Uint8Array;
  /** outcome of each entry of RehearsalResult.switches, index into SWITCH_OUTCOMES */
  switches: Uint8Array;
}

export { SWITCH_OUTCOMES, WARNING_OUTCOMES } from './outcomes.ts';

/**
 * One window and rank that was tried, with its best rule on the tuning part. `skill` is on folds that did not choose the
 * threshold, averaged with the windows next to it.
 */
export interface TriedSetting {
  delays: number;
  window: number;
  rank: number;
  variable: string;
  skill: number;
  detection: number;
  cameTrue: number | null;
  threshold: number;
}

/** What a rehearsal found. */
export interface RehearsalResult {
  request: RehearsalRequest;
  /** the answer first: "Forcing above 1.7 sd warned 41 of 43 reversals, …" */
  sentence: string;
  verdict: Verdict;
  settings: ChosenSettings;
  /** of the judged part */
  score: Score;
  /** chosen outside the ceiling, or with fewer than half coming true, for want of anything better */
  weak: boolean;
  /** a given model was fitted on what is judged here: the score says nothing about new data */
  fittedOnJudged: boolean;
  contenders: Contender[];
  pairs: TriedSetting[];
  /** settings tried in all */
  tried: number;
  table: OperatingTable;
  /** row of the table that was chosen, and the row of the plain maximum of skill on the tuning part */
  chosenRow: number;
  plainRow: number;
  recordings: {
    name: string;
    from: number;
    to: number;
    judgedFrom: number;
    samples: number;
    sha256: string;
  }[];
  /** stretches left out: marks and conditions */
  leftOut: { recording: number; from: number; to: number; why: string }[];
  switches: {
    recording: number;
    at: number;
    confirmedAt: number;
    from: number;
    to: number;
    part: 'tuning' | 'judged';
  }[];
  /** the model file that `Watch with these settings` puts into use: JSON text */
  model: string;
  seconds: number;
  program: string;
  /** RFC 3339 */
  at: string;
}

/** A search at work or done, as `GET /api/rehearsals` lists it. */
export interface RehearsalState {
  id: string;
  request: RehearsalRequest;
  state: 'running' | 'done' | 'stopped' | 'failed';
  /** share of the work done, what is being done in words, seconds left (null: not known yet) */
  done: number;
  doing: string;
  secondsLeft: number | null;
  /** why it failed, in a sentence; null otherwise */
  fault: string | null;
  startedAt: number;
  /** the result's sentence and verdict once done */
  sentence: string | null;
  verdict: Verdict | null;
}

/** What a rule would call a switch in a recording: drawn on the signal while the rule is typed. */
export interface RulePreview {
  switches: { at: number; from: number; to: number }[];
  /** switches an hour, and the share of time in each regime */
  perHour: number;
  shares: number[];
}

/** A stretch of a channel that must not count: fit, rehearsal and live watching leave it out. */
export const NewMark = z.object({
  channel: ChannelName,
  from: z.number().finite(),
  /** null: until somebody ends it */
  to: z.number().finite().nullable(),
  why: z.enum(['start-up', 'calibration', 'touched', 'other']),
  text: z.string().max(500).default(''),
  by: z.string().max(80).default(''),
});
export type NewMark = z.infer<typeof NewMark>;
export interface Mark extends NewMark {
  id: number;
}

/** Leave `channel` out while another channel is above or below a level. */
export const Condition = z.object({
  channel: ChannelName,
  when: ChannelName,
  side: z.enum(['above', 'below']),
  level: z.number().finite(),
});
export type Condition = z.infer<typeof Condition>;
export interface StoredCondition extends Condition {
  id: number;
}

/** A card for one switch: the last moments before it. */
export interface SwitchCard {
  channel: string;
  at: number;
  outcome: SwitchOutcome;
  /** the warning that covered it, and its lead; null when none did */
  warnedAt: number | null;
  lead: number | null;
  leastLead: number;
  horizon: number;
  threshold: number;
  variable: string;
  /** about three horizons before it to one after: times, signal, variable (NaN: blind) */
  t: Float64Array;
  signal: Float64Array;
  value: Float64Array;
  /** the strictest threshold that would have caught it in time, what that would have cost; null: none would */
  catching: { threshold: number; falsePerHour: number; cameTrue: number | null } | null;
  /** why it is not known what another threshold would have cost, as the end of a sentence; null or absent: it is known */
  notKnown?: string | null;
}

/** A recording being played into this server's own ingest. */
export interface PlayState {
  id: string;
  recording: string;
  as: string[];
  pace: string;
  state: 'running' | 'done' | 'stopped' | 'failed';
  fault: string | null;
}
