/**
 * Figures of the alarm standards: ANSI/ISA-18.2-2016, IEC 62682:2014 and EEMUA Publication 191 (3rd edition, 2013), as
 * several independent public summaries give them; the standards themselves were not at hand. The figures hold for one
 * operator and at least 30 days of data.
 */
import type { WarningTimes } from '../../shared-types/logbook.ts';

const TEN_MINUTES = 600;
const HOUR = 3600;
const DAY = 86400;

/** What the standards call acceptable. */
export const STANDARD = {
  /** days of data the figures are meant for */
  days: 30,
  /** called in 10 minutes and in an hour on average: very likely acceptable, and the most that is manageable */
  acceptable: { perTenMinutes: 1, perHour: 6 },
  manageable: { perTenMinutes: 2, perHour: 12 },
  /** most in any 10 minutes; periods above it are a flood's */
  mostInTenMinutes: 10,
  /** one of the summaries prints 5 for the count that a 10-minute period should not exceed */
  otherMostInTenMinutes: 5,
  mostInHour: 30,
  /** share of periods, hours and time that may be beyond */
  share: 0.01,
  /** a flood begins above 10 in 10 minutes and ends below 5 */
  flood: { above: 10, below: 5 },
  /** chattering: three within a minute */
  chattering: { times: 3, seconds: 60 },
  /** standing longer than a day; fewer than 5 on any day */
  stale: { seconds: DAY, fewerThan: 5 },
  /** EEMUA 191, one summary only */
  shelvedFewerThan: 30,
} as const;

/** How many of some stretches of time were beyond a count. */
export interface Beyond {
  of: number;
  beyond: number;
}

/** The figures of a stretch of time. Counts are of warnings that called somebody, unless said otherwise. */
export interface Figures {
  /** seconds looked at */
  seconds: number;
  called: number;
  /** warnings that called nobody: too late to speak, or of a trigger or a watch on trial */
  uncalled: number;
  /** null where less than ten minutes or an hour was looked at */
  perTenMinutes: number | null;
  perHour: number | null;
  /** most in any ten minutes */
  mostInTenMinutes: number;
  /** whole 10-minute periods with more than 10, and with more than 5; whole hours with more than 30 */
  periods: Beyond;
  periodsByOther: Beyond;
  hours: Beyond;
  /** share of the time in flood; null where less than ten minutes was looked at */
  flood: number | null;
  /** watches that warned three times within a minute, and how often a warning was such a third one */
  chattering: { watch: string; times: number }[];
  /** warnings that stood longer than a day, called or not */
  stale: number;
  /** waiting for an acknowledgement for longer than a day */
  forgotten: number;
  /** the oldest warnings are left out: there were more than are sent */
  cut: boolean;
}

/** The figures of what the server sent. */
export function figuresOf(times: WarningTimes): Figures {
  const seconds = Math.max(0, times.now - times.since);
  const called = times.madeAt.filter((_, i) => times.called[i]);
  const count = (test: (i: number) => boolean) => times.madeAt.filter((_, i) => test(i)).length;
  const age = (i: number) => times.now - times.madeAt[i]!;
  const counts = countsIn(called, times.since, times.now, TEN_MINUTES);
  const hourly = countsIn(called, times.since, times.now, HOUR);
  return {
    seconds,
    called: called.length,
    uncalled: times.madeAt.length - called.length,
    perTenMinutes: seconds < TEN_MINUTES ? null : called.length / (seconds / TEN_MINUTES),
    perHour: seconds < HOUR ? null : called.length / (seconds / HOUR),
    mostInTenMinutes: mostWithin(called, TEN_MINUTES),
    periods: beyond(counts, STANDARD.mostInTenMinutes),
    periodsByOther: beyond(counts, STANDARD.otherMostInTenMinutes),
    hours: beyond(hourly, STANDARD.mostInHour),
    flood: seconds < TEN_MINUTES ? null : floodSeconds(called, times.now) / seconds,
    chattering: chatteringOf(times),
    stale: count((i) => (times.stood[i] ?? age(i)) > STANDARD.stale.seconds),
    forgotten: count((i) => times.called[i]! && times.acknowledgedAt[i] === null && age(i) > DAY),
    cut: times.cut,
  };
}

/** How many of ascending times lie in each whole period of `length` seconds from `from` on; a rest is left out. */
export function countsIn(times: readonly number[], from: number, to: number, length: number): number[] {
  const counts = new Array<number>(Math.max(0, Math.floor((to - from) / length))).fill(0);
  for (const time of times) {
    const period = Math.floor((time - from) / length);
    if (period >= 0 && period < counts.length) counts[period]!++;
  }
  return counts;
}

const beyond = (counts: number[], most: number): Beyond => ({
  of: counts.length,
  beyond: counts.filter((count) => count > most).length,
});

/** The most of ascending times in any stretch [t, t + length). */
export function mostWithin(times: readonly number[], length: number): number {
  let most = 0;
  for (let first = 0, last = 0; last < times.length; last++) {
    while (times[last]! - times[first]! >= length) first++;
    most = Math.max(most, last - first + 1);
  }
  return most;
}

/**
 * Seconds in flood until `now`: it begins when more than 10 came within the last ten minutes and ends when fewer than 5
 * did.
 *
 * @param times ascending, none after `now`
 */
export function floodSeconds(times: readonly number[], now: number): number {
  let total = 0;
  let since: number | null = null;
  // one comes at its time and is forgotten ten minutes later
  for (let come = 0, gone = 0; gone < times.length; ) {
    const time = Math.min(times[gone]! + TEN_MINUTES, times[come] ?? Infinity);
    if (time > now) break;
    // all that comes and goes at this moment, before it is looked at
    while (gone < times.length && times[gone]! + TEN_MINUTES <= time) gone++;
    while (come < times.length && times[come]! <= time) come++;
    if (since === null && come - gone > STANDARD.flood.above) since = time;
    if (since !== null && come - gone < STANDARD.flood.below) {
      total += time - since;
      since = null;
    }
  }
  return since === null ? total : total + (now - since);
}

function chatteringOf(times: WarningTimes): Figures['chattering'] {
  const { times: many, seconds } = STANDARD.chattering;
  const found: Figures['chattering'] = [];
  times.watches.forEach((watch, index) => {
    const own = times.madeAt.filter((_, i) => times.watch[i] === index && times.called[i]);
    const thirds = own.filter((time, i) => i >= many - 1 && time - own[i - many + 1]! <= seconds).length;
    if (thirds > 0) found.push({ watch, times: thirds });
  });
  return found;
}
