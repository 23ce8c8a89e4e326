/** The first pause and the longest, seconds. */
export const FIRST_PAUSE = 0.5;
export const LONGEST_PAUSE = 60;
/** A receiver that asks for a longer pause is asked again by then. */
const LONGEST_ASKED = 300;

/**
 * Seconds to wait after so many failures: twice as long after each, up to the longest, less up to half by chance, so that
 * receivers that come back are not met by everybody at once; never less than the receiver itself asked for.
 *
 * @param failures in a row, from 1
 * @param chance   uniform in 0..1
 * @param asked    what the receiver's Retry-After said, seconds; null: nothing
 */
export function pauseAfter(failures: number, chance: number, asked: number | null): number {
  const full = Math.min(LONGEST_PAUSE, FIRST_PAUSE * 2 ** (failures - 1));
  return Math.max(full * (1 - chance / 2), Math.min(asked ?? 0, LONGEST_ASKED));
}

/**
 * Seconds of a Retry-After header (RFC 9110, section 10.2.3): a number of them, or a date; null where there is none.
 *
 * @param now Unix seconds
 */
export function retryAfter(header: string | null, now: number): number | null {
  if (header === null) return null;
  if (/^\d{1,9}$/.test(header.trim())) return Number(header);
  const date = Date.parse(header) / 1000;
  return Number.isFinite(date) ? Math.max(0, date - now) : null;
}
