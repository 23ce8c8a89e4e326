import { z } from 'zod';

/** What became of a warning; the definitions are the project's scoring rules (server/watch/grading.ts). */
export type WarningOutcome = 'open' | 'true' | 'repeat' | 'late' | 'false' | 'unseen' | 'acted';

/** What grading alone gives: whether a warning was acted on only a person or an output can say. */
export type GradedOutcome = Exclude<WarningOutcome, 'acted'>;

/** What became of a switch. */
export type SwitchOutcome = 'pending' | 'warned' | 'late' | 'missed' | 'blind';

/** One warning: issued at a time, speaking for a span, with an outcome. Times are channel time unless said. */
export interface Warning {
  /** ascending in the order of issue, unique in a store */
  id: number;
  watch: string;
  model: string;
  channels: string[];
  /** time of the newest raw sample the warning needed */
  at: number;
  /** the span it speaks for: (at + least lead, at + horizon] */
  from: number;
  to: number;
  /** server clock, Unix seconds: when it was computed and when the first page or receiver had it */
  madeAt: number;
  deliveredAt: number | null;
  variable: string;
  value: number;
  threshold: number;
  outcome: WarningOutcome;
  /** the switch that settled it and its lead, when one did */
  switchAt: number | null;
  lead: number | null;
  acknowledgedAt: number | null;
  acknowledgedBy: string | null;
  /** somebody or something acted on it: its outcome is then `acted`; absent or null: nobody said so */
  acted?: Acted | null;
  /** a person was to be called by it: in use, no trigger, not set aside, in time; absent in older stores */
  called?: boolean;
  /** it came too late to speak: made after its span began; no tone, no webhook */
  quiet: boolean;
}

/** That a warning was acted on, so that what happened after it no longer grades it. */
export interface Acted {
  /** server clock, Unix seconds */
  at: number;
  /** a person's or an output's name; '' when not said */
  by: string;
  /** what was done, in words */
  text: string;
  /** what it would be without, as far as it is known by now */
  outcome: GradedOutcome;
}

/** What a person or an output may say of a warning; `acted` false takes it back. */
export const ActedOn = z.object({
  acted: z.boolean().default(true),
  by: z.string().max(80).default(''),
  text: z.string().max(500).default(''),
});
export type ActedOn = z.infer<typeof ActedOn>;

/** One switch of a watch's regime. Times are channel time. */
export interface SwitchEvent {
  id: number;
  watch: string;
  channel: string;
  /** onset */
  at: number;
  confirmedAt: number;
  /** server clock, Unix seconds, when it was noted; absent in older stores and in rehearsals */
  loggedAt?: number;
  /** regime before and after: 0, 1, … from the lowest band up; for one-sided rules 0 quiet, 1 active */
  from: number;
  to: number;
  outcome: SwitchOutcome;
  /** the first warning that covered it, and its lead in seconds */
  warning: number | null;
  lead: number | null;
}

/** A line of the logbook. */
export interface LogEntry {
  id: number;
  /** server clock, Unix seconds */
  time: number;
  kind:
    | 'acknowledged'
    /** a warning was acted on, or that was taken back */
    | 'acted'
    /** an alarm latches or no longer does; a latched one was reset */
    | 'latch'
    | 'shelved'
    | 'unshelved'
    | 'out of service'
    | 'in service'
    | 'gap'
    | 'hole'
    | 'refused'
    | 'model'
    | 'watch'
    | 'server'
    | 'note'
    | 'likeness'
    /** a stretch or a condition is left out, or no longer */
    | 'mark'
    | 'rehearsal'
    | 'play'
    /** what did not reach a receiver, and trials */
    | 'delivery';
  channel: string | null;
  watch: string | null;
  by: string | null;
  text: string;
}
