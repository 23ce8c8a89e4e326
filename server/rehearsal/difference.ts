/** Resamples of the events. */
const RESAMPLES = 2000;

/** What became of each event that counts, and the share of time in spans. */
export interface Judged {
  /** 1: warned, 0: not */
  warned: Uint8Array;
  tau: number;
}

/**
 * 95 % percentile interval of the difference in skill of two warners judged on the same events: events are drawn again
 * with replacement, both warners' outcomes of an event together; the shares of time in spans stay as they are.
 *
 * @param uniform seeded, in [0, 1)
 * @see Efron 1979, Annals of Statistics 7, 1
 */
export function skillDifference(
  ours: Judged,
  theirs: Judged,
  uniform: () => number,
  resamples = RESAMPLES,
): { value: number; low: number; high: number } {
  const events = ours.warned.length;
  const gain = Int8Array.from(ours.warned, (warned, i) => warned - theirs.warned[i]!);
  const cost = ours.tau - theirs.tau;
  const drawn = new Float64Array(resamples);
  for (let r = 0; r < resamples; r++) {
    let sum = 0;
    for (let i = 0; i < events; i++) sum += gain[Math.floor(uniform() * events)]!;
    drawn[r] = sum / events - cost;
  }
  drawn.sort();
  return {
    value: gain.reduce((sum, one) => sum + one, 0) / events - cost,
    low: drawn[Math.floor(0.025 * resamples)]!,
    high: drawn[Math.ceil(0.975 * resamples) - 1]!,
  };
}
