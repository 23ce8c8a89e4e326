import type { FrameToStore } from './store.ts';

/** Frames on their way to the store's thread: one array of all their numbers, to be handed over without copying. */
export interface PackedFrames {
  /** per frame, in order: its times where it has any, then its values */
  numbers: Float64Array;
  heads: (Omit<FrameToStore, 'times' | 'values'> & { samples: number; timed: boolean })[];
}

/** Copies frames into one array of their own, so that the caller's arrays stay the caller's. */
export function packFrames(frames: readonly FrameToStore[]): PackedFrames {
  let length = 0;
  for (const { times, values } of frames) length += values.length + (times?.length ?? 0);
  const numbers = new Float64Array(length);
  let at = 0;
  const heads = frames.map(({ times, values, ...head }) => {
    if (times !== null) {
      numbers.set(times, at);
      at += times.length;
    }
    numbers.set(values, at);
    at += values.length;
    return { ...head, samples: values.length, timed: times !== null };
  });
  return { numbers, heads };
}

/** The frames again, as views on the one array. */
export function unpackFrames({ numbers, heads }: PackedFrames): FrameToStore[] {
  let at = 0;
  const take = (count: number) => numbers.subarray(at, (at += count));
  return heads.map(({ samples, timed, ...head }) => {
    const times = timed ? take(samples) : null;
    return { ...head, times, values: take(samples) };
  });
}
