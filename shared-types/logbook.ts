import { z } from 'zod';
import { ChannelName } from './channel.ts';
import type { LogEntry, SwitchEvent, Warning } from './warning.ts';

/** What a line of the logbook is about: a warning, a switch, or what the log calls it. */
export type LogbookKind = 'warning' | 'switch' | LogEntry['kind'];

/** A line of the logbook: a warning, a switch or an entry of the log, in words and as it is kept. */
export interface LogbookEntry {
  /** `warning 12`, `switch 3`, `log 7`: one line, whatever becomes of it */
  key: string;
  kind: LogbookKind;
  /**
   * what the lines are ordered by: channel time of a warning or switch, or the server's clock where channel time is
   * elapsed time (below 1e8) and for everything else
   */
  time: number;
  /** channel time to jump to: a warning's `at`, a switch's onset; null where nothing happened on a channel */
  at: number | null;
  channel: string | null;
  watch: string | null;
  /** the watch's name */
  name: string | null;
  /** who did it, or who acknowledged it; '' where nobody said */
  by: string;
  /** what happened, and what became of it ('' where nothing can), in words */
  text: string;
  became: string;
  /** a person is still asked for: an open warning that nobody has acknowledged */
  waits: boolean;
  warning: Warning | null;
  switch: SwitchEvent | null;
}

/** A page of the logbook, newest first. */
export interface LogbookPage {
  entries: LogbookEntry[];
  /** where the next, older page begins (`before`); null: there is no older line */
  next: string | null;
}

/**
 * What the figures of the alarm standards are made of: the warnings of the last 30 days as arrays of one length, oldest
 * first. Times are the server's clock, Unix seconds.
 */
export interface WarningTimes {
  /** the logbook's first line within these 30 days, and now */
  since: number;
  now: number;
  watches: string[];
  /** index into `watches` */
  watch: number[];
  madeAt: number[];
  /** somebody was called: not too late to speak, and not of a trigger or a watch on trial */
  called: boolean[];
  /** when it was acknowledged; null: not yet */
  acknowledgedAt: (number | null)[];
  /** seconds it stood open: until its switch came or its span was over; null: it stands yet */
  stood: (number | null)[];
  /** more warnings than are sent: the oldest are left out and `since` is that of the first one sent */
  cut: boolean;
}

/** A note as a person writes it. */
export const NewNote = z.object({
  channel: ChannelName.nullable().default(null),
  text: z.string().trim().min(1).max(2000),
  by: z.string().trim().max(80).default(''),
});
export type NewNote = z.infer<typeof NewNote>;
