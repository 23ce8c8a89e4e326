/** The frame's first time, or why it cannot have one. Seconds. */
export type Stamp = { ok: true; t0: number } | { ok: false; detail: string };

/** Arrival may differ from the regular continuation by this many frames, or by LEAST_SLACK, before it counts. */
const SLACK_FRAMES = 4;
const LEAST_SLACK_SECONDS = 0.5;
/** a channel whose stamps run ahead of the clock by more than this is sending faster than its dt says */
const FURTHEST_AHEAD_SECONDS = 10;

/**
 * Stamps a frame that came without times: the newest sample at arrival, or one dt after the frame before when
 * that differs by little, so that data sent regularly stay regular whatever the network does to them. After a
 * longer pause the stamps start anew at arrival; they never step back.
 *
 * @param last    time of the channel's newest sample, seconds; null: none yet
 * @param arrival server clock when the frame arrived, Unix seconds
 * @param dt      seconds between samples
 * @param count   samples in the frame
 */
export function stampOnArrival(last: number | null, arrival: number, dt: number, count: number): Stamp {
  const span = dt * (count - 1);
  const anchored = arrival - span;
  if (last === null) return { ok: true, t0: anchored };
  const continued = last + dt;
  const late = anchored - continued;
  const slack = Math.max(LEAST_SLACK_SECONDS, SLACK_FRAMES * dt * count);
  if (late > slack) return { ok: true, t0: anchored };
  if (-late > Math.max(FURTHEST_AHEAD_SECONDS, 2 * slack)) {
    const ahead = (continued + span - arrival).toFixed(1);
    return {
      ok: false,
      detail: `values come faster than dt = ${dt} s says and are ${ahead} s ahead of the clock; send the true dt`,
    };
  }
  return { ok: true, t0: continued };
}
