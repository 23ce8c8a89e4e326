/** Resamples of the events. */
const RESAMPLES = 2000;

/** What a warner did event by event. Each event has the time since the one before it, so that it can be drawn with it. */
export interface Judged {
  /** 1: warned, 0: not */
  warned: Uint8Array;
  /** watched steps since the event before, and those of them inside the spans of warnings; as many as there are events */
  watched: Int32Array;
  spanned: Int32Array;
}

/**
 * 95 % percentile interval of the difference in skill of two warners judged on the same events. Events are drawn again
 * with replacement, each with the time before it (a block bootstrap with the blocks that the events make), both
 * warners' fates of an event together; detection and the share of time in spans are made anew of what was drawn.
 *
 * @param uniform seeded, in [0, 1)
 * @see Efron 1979, Annals of Statistics 7, 1; Künsch 1989, Annals of Statistics 17, 1217 (blocks)
 */
export function skillDifference(
  ours: Judged,
  theirs: Judged,
  uniform: () => number,
  resamples = RESAMPLES,
): { value: number; low: number; high: number } {
  const events = ours.warned.length;
  const drawn = new Float64Array(resamples);
  const picks = new Int32Array(events);
  for (let r = 0; r < resamples; r++) {
    for (let i = 0; i < events; i++) picks[i] = Math.floor(uniform() * events);
    drawn[r] = skillOn(ours, picks) - skillOn(theirs, picks);
  }
  drawn.sort();
  const all = picks.map((_, i) => i);
  return {
    value: skillOn(ours, all) - skillOn(theirs, all),
    low: drawn[Math.floor(0.025 * resamples)]!,
    high: drawn[Math.ceil(0.975 * resamples) - 1]!,
  };
}

/** detection − τ on the events picked. */
function skillOn({ warned, watched, spanned }: Judged, picks: Int32Array): number {
  let [hits, time, inside] = [0, 0, 0];
  for (let i = 0; i < picks.length; i++) {
    const event = picks[i]!;
    hits += warned[event]!;
    time += watched[event]!;
    inside += spanned[event]!;
  }
  return hits / picks.length - (time === 0 ? 0 : inside / time);
}
