import type { FrameToStore } from './store.ts';

/**
 * The times of a block of samples, as float64 in pieces one after another:
 *   regular   count, dt, t0, offset      sample i of the piece is at t0 + (offset + i)·dt, bit for bit
 *   explicit  −count, then count times
 * `numbers` is large enough for any block of `capacity` samples; the first `used` are valid.
 */
export interface TimePieces {
  numbers: Float64Array;
  used: number;
  /** where the last piece begins; −1 while there is none */
  last: number;
}

/** Fewer samples than this are cheaper written out. */
const SHORTEST_REGULAR = 4;

/** Room for the times of `capacity` samples: in the worst case two numbers a sample. */
export function createTimePieces(capacity: number): TimePieces {
  return { numbers: new Float64Array(2 * capacity + 4), used: 0, last: -1 };
}

/** Time of sample `index` of a frame, seconds. */
export function frameTime(frame: Pick<FrameToStore, 't0' | 'dt' | 'times'>, index: number): number {
  return frame.times === null ? frame.t0 + index * frame.dt : frame.times[index]!;
}

/** Adds the times of samples [from, from + count) of a frame to the pieces. */
export function addTimes(
  pieces: TimePieces,
  frame: Pick<FrameToStore, 't0' | 'dt' | 'times'>,
  from: number,
  count: number,
): void {
  const { numbers, last } = pieces;
  const regular = frame.times === null && frame.dt > 0;
  if (regular && last >= 0 && numbers[last]! > 0 && continues(numbers, last, frame, from, count)) {
    numbers[last]! += count;
    return;
  }
  if (regular && count >= SHORTEST_REGULAR) {
    pieces.last = pieces.used;
    numbers.set([count, frame.dt, frame.t0, from], pieces.used);
    pieces.used += 4;
    return;
  }
  if (last < 0 || numbers[last]! > 0) {
    pieces.last = pieces.used;
    numbers[pieces.used++] = 0;
  }
  numbers[pieces.last]! -= count;
  for (let i = 0; i < count; i++) numbers[pieces.used++] = frameTime(frame, from + i);
}

function continues(
  numbers: Float64Array,
  piece: number,
  frame: Pick<FrameToStore, 't0' | 'dt'>,
  from: number,
  count: number,
): boolean {
  const [before, dt, t0, offset] = [
    numbers[piece]!,
    numbers[piece + 1]!,
    numbers[piece + 2]!,
    numbers[piece + 3]!,
  ];
  if (dt !== frame.dt) return false;
  for (let i = 0; i < count; i++)
    if (t0 + (offset + before + i) * dt !== frame.t0 + (from + i) * dt) return false;
  return true;
}

/** Writes the times that the first `used` numbers of `numbers` stand for into `out` from `at` on; returns how many. */
export function readTimesInto(numbers: Float64Array, used: number, out: Float64Array, at: number): number {
  let filled = at;
  for (let piece = 0; piece < used; ) {
    const count = Math.abs(numbers[piece]!);
    if (numbers[piece]! > 0) {
      const [dt, t0, offset] = [numbers[piece + 1]!, numbers[piece + 2]!, numbers[piece + 3]!];
      for (let i = 0; i < count; i++) out[filled++] = t0 + (offset + i) * dt;
      piece += 4;
    } else {
      out.set(numbers.subarray(piece + 1, piece + 1 + count), filled);
      filled += count;
      piece += 1 + count;
    }
  }
  return filled - at;
}

/** The pieces that `numbers` holds, ready to be added to; `last` is found by walking over them. */
export function resumeTimePieces(numbers: Float64Array, capacity: number): TimePieces {
  const pieces = createTimePieces(capacity);
  pieces.numbers.set(numbers);
  while (pieces.used < numbers.length) {
    pieces.last = pieces.used;
    pieces.used += numbers[pieces.used]! > 0 ? 4 : 1 - numbers[pieces.used]!;
  }
  return pieces;
}
