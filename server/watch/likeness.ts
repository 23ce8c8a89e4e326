import type { Likeness } from '../../shared-types/watch.ts';

/**
 * Whether the data still look like the training data, slow enough to be believed: a count goes up for every window
 * beyond the model's limits and down for every other; at one whole window's worth the data are called unlike the
 * model, since the moment the count left zero, and like it again when it is back at zero.
 */
export interface LikenessState {
  count: number;
  /** when the count left zero, seconds */
  since: number;
  unlike: boolean;
}

export const createLikeness = (): LikenessState => ({ count: 0, since: Number.NaN, unlike: false });

/** One step with a full window; true when the answer changed. */
export function stepLikeness(state: LikenessState, time: number, beyond: boolean, delays: number): boolean {
  if (beyond) {
    if (state.count === 0) state.since = time;
    if (state.count < 2 * delays) state.count++;
    if (state.unlike || state.count < delays) return false;
    state.unlike = true;
    return true;
  }
  if (state.count > 0) state.count--;
  if (!state.unlike || state.count > 0) return false;
  state.unlike = false;
  return true;
}

export function likenessOf(state: LikenessState, known: boolean): Likeness {
  if (!known) return { kind: 'not known' };
  return state.unlike ? { kind: 'unlike', since: state.since } : { kind: 'like' };
}
