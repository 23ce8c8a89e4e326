/** What is known of a channel's clock: server clock minus channel time, seconds. Plain data. */
export interface ClockOffset {
  /** the least offset lately: what separates the clocks when nothing is held up on the way */
  least: number | null;
  /** smoothed, for display */
  smooth: number | null;
  /** offset at the start of the present window, when it started and the least within it */
  windowStart: number;
  windowFirst: number;
  windowLeast: number;
  newest: number;
}

/** A window is long enough to tell a producer that is late for good from one that is catching up. */
const WINDOW_SECONDS = 10;
/** frames further apart begin a new window */
const PAUSE_SECONDS = 2;
/** an offset falling faster than this, in seconds a second, means that held-up data are being sent after */
const CATCHING_UP = 0.1;
const SMOOTHING = 0.1;
/** Unix times from here on; below it is elapsed time, whose zero says nothing */
const UNIX_FROM = 1e8;
const DAY_SECONDS = 86_400;

/** Unix times of the last day are at first taken for data held up, not for a clock that is slow. */
function firstOffset(time: number, offset: number): number {
  return time >= UNIX_FROM && offset > 0 && offset < DAY_SECONDS ? 0 : offset;
}

export function createClockOffset(least: number | null): ClockOffset {
  return {
    least,
    smooth: null,
    windowStart: 0,
    windowFirst: 0,
    windowLeast: 0,
    newest: Number.NEGATIVE_INFINITY,
  };
}

/**
 * Notes that samples up to channel time `time` arrived at server time `arrival` (seconds both). A larger offset than
 * before is first taken for data held up on the way; once a whole window has gone by at the pace of the clock, the
 * channel's own clock is taken to have been set back or paused, and the new offset holds.
 *
 * @param clock overwritten
 */
export function noteArrival(clock: ClockOffset, time: number, arrival: number): void {
  const offset = arrival - time;
  clock.least = clock.least === null ? firstOffset(time, offset) : Math.min(clock.least, offset);
  clock.smooth = clock.smooth === null ? offset : clock.smooth + SMOOTHING * (offset - clock.smooth);
  const elapsed = arrival - clock.windowStart;
  if (arrival - clock.newest > PAUSE_SECONDS || elapsed >= WINDOW_SECONDS) {
    const paced =
      arrival - clock.newest <= PAUSE_SECONDS && clock.windowFirst - offset < CATCHING_UP * elapsed;
    if (paced) clock.least = Math.min(clock.windowLeast, offset);
    clock.windowStart = arrival;
    clock.windowFirst = offset;
    clock.windowLeast = offset;
  } else clock.windowLeast = Math.min(clock.windowLeast, offset);
  clock.newest = arrival;
}

/**
 * The server's clock was set: what was known of the channel's stays true of the new one, so that channel time goes on.
 *
 * @param clock   overwritten
 * @param seconds by which it was set forwards
 */
export function serverStepped(clock: ClockOffset, seconds: number): void {
  if (clock.least !== null) clock.least += seconds;
  if (clock.smooth !== null) clock.smooth += seconds;
  clock.windowStart += seconds;
  clock.windowFirst += seconds;
  clock.windowLeast += seconds;
  clock.newest += seconds;
}

/** Channel time at a moment of the server clock; null before the first sample. */
export function channelTime(clock: ClockOffset, serverTime: number): number | null {
  return clock.least === null ? null : serverTime - clock.least;
}
