/** A clock steered by what arrives: its time is the local monotonic clock (s) plus `offset`; null: not yet set. */
export interface Clock {
  offset: number | null;
}

/** A clock that has not been set. */
export function createClock(): Clock {
  return { offset: null };
}

/** Share of the way a clock that runs ahead is let back at each report. */
const LETTING_BACK = 0.05;
/** Beyond this many seconds ahead a clock is set anew instead of being let back. */
const SET_ANEW = 2;

/**
 * Steers a clock by one report: at the monotonic moment `received` the newest sample bore the time `newest` and
 * was `age` seconds old. A late report slows the clock gently; it never lags behind a sample that is there.
 *
 * @param clock changed in place
 */
export function steer(clock: Clock, newest: number, age: number, received: number): void {
  const offset = newest + age - received;
  const ahead = clock.offset === null ? Infinity : clock.offset - offset;
  if (ahead <= 0 || ahead > SET_ANEW) clock.offset = offset;
  else clock.offset! -= LETTING_BACK * ahead;
}

/** The clock's time at a monotonic moment (s); null before the first report. */
export function timeAt(clock: Clock | undefined, monotonic: number): number | null {
  return clock === undefined || clock.offset === null ? null : clock.offset + monotonic;
}
