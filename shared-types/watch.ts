import { z } from 'zod';
import { ChannelName } from './channel.ts';

const direction = z.enum(['up', 'down']).optional();
const finite = z.number().finite();

/** What counts as a switch, and when it happened. The text form is `RULE` of the commands. */
export const RegimeRule = z.discriminatedUnion('kind', [
  z.object({ kind: z.literal('sides'), low: finite, high: finite, to: direction }),
  z.object({
    kind: z.literal('levels'),
    levels: z.array(finite).min(1),
    deadband: finite.nonnegative(),
    to: direction,
  }),
  z.object({
    kind: z.literal('excursion'),
    level: finite,
    rearm: finite,
    gap: finite.nonnegative(),
    to: direction,
  }),
  z.object({
    kind: z.literal('dip'),
    level: finite,
    rearm: finite,
    gap: finite.nonnegative(),
    to: direction,
  }),
  z.object({
    kind: z.literal('burst'),
    window: finite.positive(),
    level: finite.positive(),
    rearm: finite.positive(),
    to: direction,
  }),
  z.object({ kind: z.literal('marks'), channel: ChannelName, to: direction }),
]);
export type RegimeRule = z.infer<typeof RegimeRule>;

/** The watched variable: |forcing| in standard deviations, or a plain level of the (first) channel in its unit. */
export const Variable = z.enum(['forcing', 'level']);
export type Variable = z.infer<typeof Variable>;

/** When to warn. Spans are seconds; threshold and rearm are in the variable's own scale. */
export const WatchRule = z.object({
  variable: Variable,
  /** rising: warn above the threshold; falling: warn below it (plain levels only) */
  direction: z.enum(['rising', 'falling']).default('rising'),
  threshold: finite,
  rearm: finite,
  onDelay: finite.nonnegative(),
  holdOff: finite.nonnegative(),
  leastLead: finite.nonnegative(),
  horizon: finite.positive(),
});
export type WatchRule = z.infer<typeof WatchRule>;

/** The states of ISA-18.2 / IEC 62682 that a watch can be in. */
export type AlarmState =
  | 'normal'
  | 'unacknowledged'
  | 'acknowledged'
  | 'returned to normal, unacknowledged'
  | 'latched, unacknowledged'
  | 'latched, acknowledged'
  | 'shelved'
  | 'out of service';

/** What a person may do to a watch. */
export const WatchAction = z.discriminatedUnion('action', [
  z.object({
    action: z.literal('acknowledge'),
    upTo: z.number().int().nonnegative().optional(),
    by: z.string().max(80).default(''),
  }),
  z.object({
    action: z.literal('shelve'),
    seconds: z
      .number()
      .positive()
      .max(7 * 86400),
    reason: z.string().min(1).max(500),
    by: z.string().max(80).default(''),
  }),
  /** lets a latched alarm go that was acknowledged */
  z.object({ action: z.literal('reset'), by: z.string().max(80).default('') }),
  /** whether an alarm stays, after return to normal, until somebody resets it */
  z.object({ action: z.literal('latch'), on: z.boolean(), by: z.string().max(80).default('') }),
  z.object({ action: z.literal('unshelve'), by: z.string().max(80).default('') }),
  z.object({
    action: z.literal('take out of service'),
    reason: z.string().min(1).max(500),
    by: z.string().max(80).default(''),
  }),
  z.object({ action: z.literal('return to service'), by: z.string().max(80).default('') }),
]);
export type WatchAction = z.infer<typeof WatchAction>;

/** What a person may say when putting a model on a channel. */
export const NewWatch = z.object({
  name: z.string().min(1).max(80).optional(),
  model: z.string().min(1).max(200),
  /** one channel per channel of the model, in the model's order */
  channels: z.array(ChannelName).min(1),
  /** below this least lead (seconds) nobody is asked to acknowledge; see "trigger" */
  reaction: z.number().nonnegative().default(30),
  /** its alarm stays, after return to normal, until somebody resets it */
  latching: z.boolean().default(false),
  /** on trial it runs beside the one in use, unseen by the operator, graded alike */
  use: z.enum(['in use', 'on trial']).default('in use'),
});
export type NewWatch = z.infer<typeof NewWatch>;
/** as it is sent: what has a default may be left out */
export type NewWatchToSend = z.input<typeof NewWatch>;

/** Whether a watch sees: `blind` until its delay window is full. */
export type Sight =
  | { kind: 'seeing' }
  /** seconds of good data still missing until the window is full */
  | { kind: 'blind'; left: number };

/** Whether the data look like the training data (SPE and T², see server/model/validity.ts). */
export type Likeness = { kind: 'like' } | { kind: 'unlike'; since: number } | { kind: 'not known' };

/** A watch as the pages and `GET /api/watches` see it. */
export interface WatchState {
  watch: string;
  name: string;
  model: string;
  channels: string[];
  use: 'in use' | 'on trial' | 'taken out of use';
  state: AlarmState;
  /** when the shelf ends (server clock, Unix seconds) and why; null unless shelved */
  shelvedUntil: number | null;
  reason: string | null;
  /** who shelved it or took it out of service; null: nobody did, or they did not say */
  setAsideBy: string | null;
  /** its alarm stays, after return to normal, until somebody resets it */
  latching: boolean;
  /** nobody is asked to acknowledge: the least lead is shorter than a person's reaction */
  trigger: boolean;
  window: number;
  delays: number;
  rank: number;
  interval: number;
  rule: WatchRule | null;
  regime: RegimeRule | null;
  regimeChannel: string | null;
  /** words for the two regimes and the switch, for headlines: "reversal" */
  switchWord: string;
  sight: Sight;
  /** why the newest samples do not count, in words: "calibration", "bath above 30"; null: they do */
  leftOut: string | null;
  /** a silent channel of a condition that samples wait for, because only it can tell whether they count; null: none */
  waitsFor: string | null;
  likeness: Likeness;
  /** newest value of the variable and the channel time it is stamped with */
  value: number | null;
  at: number | null;
  /** index of the regime the channel is in, null between regimes or before the first is known */
  regimeNow: number | null;
  /** the verdict of the rehearsal that chose its settings, in words; null: it was not rehearsed */
  verdict: string | null;
  /** what rehearsal promised; null when the model carries no score */
  promise: import('./score.ts').Score | null;
  /** what happened live, judged by the same definitions */
  grade: import('./score.ts').Score | null;
  /** the same as people had it: warnings made too late to speak count for nothing */
  gradeAtDelivery: import('./score.ts').Score | null;
  /** channel time the live grade counts from, and the one at delivery: not before the watch began */
  gradeSince: number | null;
  heardSince: number | null;
}
