/**
 * The newest samples of every channel of a watch, centred, in straight arrays, so that the projection reads them
 * without wrapping. Room for `blockSteps` new steps beyond the delays; when it is used up the tail moves to the front.
 */
export interface DelayLine {
  delays: number;
  /** one per channel, delays − 1 + blockSteps long */
  lines: Float64Array[];
  /** index of the next step in each line */
  next: number;
  /** steps since the run began, at most `delays`: the window is full at `delays` */
  filled: number;
}

/** Steps projected at a time: large enough for the kernel, small enough for the first cache. */
export const BLOCK_STEPS = 1024;

export function createDelayLine(channels: number, delays: number): DelayLine {
  const lines = Array.from({ length: channels }, () => new Float64Array(delays - 1 + BLOCK_STEPS));
  return { delays, lines, next: 0, filled: 0 };
}

/** Makes room for `steps` ≤ BLOCK_STEPS more, keeping the newest delays − 1 of each channel. */
export function makeRoom(line: DelayLine, steps: number): void {
  const length = line.delays - 1 + BLOCK_STEPS;
  if (line.next + steps <= length) return;
  const kept = Math.min(line.next, line.delays - 1);
  for (const values of line.lines) values.copyWithin(0, line.next - kept, line.next);
  line.next = kept;
}

/** The newest delays − 1 values of each channel alone: all that later windows can need. */
export function packLine(line: DelayLine): DelayLine {
  const kept = Math.min(line.next, line.delays - 1);
  return {
    ...line,
    lines: line.lines.map((values) => values.slice(line.next - kept, line.next)),
    next: kept,
  };
}

/** A delay line that goes on from a packed one. */
export function unpackLine(packed: DelayLine): DelayLine {
  const line = createDelayLine(packed.lines.length, packed.delays);
  packed.lines.forEach((values, c) => {
    line.lines[c]!.set(values);
  });
  return { ...line, next: packed.next, filled: packed.filled };
}

/** Appends centred values of one channel for `count` steps; the caller moves `next` on. */
export function appendCentred(
  line: DelayLine,
  channel: number,
  values: Float64Array,
  from: number,
  count: number,
  mean: number,
): void {
  const target = line.lines[channel]!;
  for (let i = 0, at = line.next; i < count; i++, at++) target[at] = values[from + i]! - mean;
}

/**
 * Counts `count` appended steps as the line's newest and marks those whose window is full.
 *
 * @param starts starts[from + i] 1: a run begins at step i, and the window is empty before it
 * @param full   count; 1 where the window is full, else 0
 */
export function markFull(
  line: DelayLine,
  starts: Uint8Array,
  from: number,
  count: number,
  full: Uint8Array,
): void {
  for (let i = 0; i < count; i++) {
    if (starts[from + i] === 1) line.filled = 0;
    if (line.filled < line.delays) line.filled++;
    full[i] = line.filled === line.delays ? 1 : 0;
  }
}

/** Index behind the stretch of equal marks that begins at `begin`. */
export function stretchEnd(full: Uint8Array, begin: number, count: number): number {
  let end = begin + 1;
  while (end < count && full[end] === full[begin]) end++;
  return end;
}
