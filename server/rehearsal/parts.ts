import type { GradingSpans } from '../watch/grading.ts';

/** From this many recordings on, parts are whole recordings. */
const WHOLE_RECORDINGS = 4;

/**
 * The time at which each recording's judged part begins: its start where all of it is judged, never
 * where all of it is for tuning.
 *
 * @param recordings first and last grid time of each, seconds
 * @param tunePart   share of the time, or with four or more recordings of the recordings, that is for tuning
 */
export function judgedFromTimes(
  recordings: readonly { start: number; end: number; interval: number }[],
  tunePart: number,
): number[] {
  const whole = Math.round(tunePart * recordings.length);
  return recordings.map(({ start, end, interval }, index) => {
    if (recordings.length >= WHOLE_RECORDINGS) return index < whole ? Number.POSITIVE_INFINITY : start;
    return start + tunePart * (end + interval - start);
  });
}

/**
 * The time from which a recording is scored: where its judged part begins within it, a horizon later, so that every
 * warning that could cover a scored switch lies in the judged part.
 */
export function scoredFromTime(
  recording: { start: number },
  judgedFrom: number,
  spans: GradingSpans,
): number {
  return judgedFrom > recording.start ? judgedFrom + spans.horizon * spans.interval : judgedFrom;
}
