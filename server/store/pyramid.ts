/** Nodes of a level that become one node of the next, and samples that become one node of level 1. */
export const FAN_OUT = 32;
/** Samples of a block: the children of one node of level 2. */
export const BLOCK_SAMPLES = FAN_OUT * FAN_OUT;
/** Numbers of a node: time of its first and last finite sample, least and greatest value; all NaN where none is finite. */
export const NODE_NUMBERS = 4;

/** Nodes not yet part of a full row, level by level (level 1 at index 0). */
export interface OpenLevel {
  /** FAN_OUT nodes of NODE_NUMBERS, the first `count` valid */
  nodes: Float64Array;
  count: number;
  /** which row of the level this is */
  block: number;
  /** changed since it was written */
  dirty: boolean;
}

/** A row of a level without nodes. */
export function createOpenLevel(block: number): OpenLevel {
  return { nodes: new Float64Array(FAN_OUT * NODE_NUMBERS), count: 0, block, dirty: false };
}

/**
 * Node over samples [from, from + FAN_OUT), written to out[at …].
 *
 * @param times  seconds, ascending
 * @param values NaN where there is no value
 */
export function sampleNodeInto(
  times: Float64Array,
  values: Float64Array,
  from: number,
  out: Float64Array,
  at: number,
): void {
  let first = Number.NaN;
  let last = Number.NaN;
  let low = Number.POSITIVE_INFINITY;
  let high = Number.NEGATIVE_INFINITY;
  for (let i = from; i < from + FAN_OUT; i++) {
    const value = values[i]!;
    if (!Number.isFinite(value)) continue;
    if (Number.isNaN(first)) first = times[i]!;
    last = times[i]!;
    if (value < low) low = value;
    if (value > high) high = value;
  }
  const none = Number.isNaN(first);
  out[at] = first;
  out[at + 1] = last;
  out[at + 2] = none ? Number.NaN : low;
  out[at + 3] = none ? Number.NaN : high;
}

/** Node over a full row of FAN_OUT nodes, written to out[at …]. */
export function parentNodeInto(nodes: Float64Array, out: Float64Array, at: number): void {
  let first = Number.NaN;
  let last = Number.NaN;
  let low = Number.POSITIVE_INFINITY;
  let high = Number.NEGATIVE_INFINITY;
  for (let n = 0; n < FAN_OUT * NODE_NUMBERS; n += NODE_NUMBERS) {
    if (Number.isNaN(nodes[n]!)) continue;
    if (Number.isNaN(first)) first = nodes[n]!;
    last = nodes[n + 1]!;
    if (nodes[n + 2]! < low) low = nodes[n + 2]!;
    if (nodes[n + 3]! > high) high = nodes[n + 3]!;
  }
  const none = Number.isNaN(first);
  out[at] = first;
  out[at + 1] = last;
  out[at + 2] = none ? Number.NaN : low;
  out[at + 3] = none ? Number.NaN : high;
}

/**
 * Adds the node over samples [from, from + FAN_OUT) to level 1. Whenever a row is full, `write` gets it (with its
 * level, from 1) before it is emptied, and the node over it goes to the level above, which is made where missing.
 */
export function addSampleNode(
  levels: OpenLevel[],
  times: Float64Array,
  values: Float64Array,
  from: number,
  write: (level: number, row: OpenLevel) => void,
): void {
  const row = (levels[0] ??= createOpenLevel(0));
  sampleNodeInto(times, values, from, row.nodes, row.count++ * NODE_NUMBERS);
  row.dirty = true;
  for (let level = 0; levels[level]!.count === FAN_OUT; level++) {
    const full = levels[level]!;
    const parent = (levels[level + 1] ??= createOpenLevel(0));
    parentNodeInto(full.nodes, parent.nodes, parent.count++ * NODE_NUMBERS);
    parent.dirty = true;
    write(level + 1, full);
    full.count = 0;
    full.block++;
    full.dirty = false;
  }
}
