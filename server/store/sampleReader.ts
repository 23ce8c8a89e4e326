import type { Database } from 'better-sqlite3';
import { copyBlob, fromBlob } from './blobs.ts';
import { BLOCK_SAMPLES, FAN_OUT, NODE_NUMBERS } from './pyramid.ts';
import { readTimesInto } from './sampleTimes.ts';
import type { Segment, Span } from './spans.ts';

/** Gets what a walk over the pyramid meets, in time order; all-NaN stretches are passed over. */
export interface Visitor {
  /** whether a node over samples from `first` to `last` is to be looked into */
  splits(first: number, last: number): boolean;
  /** a node that was not looked into (`samples` = 32, 1024, …) or one finite sample (`samples` = 1) */
  take(first: number, last: number, low: number, high: number, samples: number): void;
  /** samples without a value, or pruned ones */
  missing(): void;
}

/** Reads samples and pyramid nodes of segments; the caller has flushed what is unfinished. */
export interface SampleReader {
  findSeries(kind: string, name: string): number | null;
  segments(series: number): Segment[];
  /** what is there of samples [from, to) of a segment, written to times[at …] and values[at …] one after another */
  readInto(
    segment: Segment,
    from: number,
    to: number,
    times: Float64Array,
    values: Float64Array,
    at: number,
  ): void;
  /** indices [from, to) of a span's samples within its segment */
  rangeOf(span: Span): { from: number; to: number };
  /** visits samples [from, to) of a segment, beginning at a level of the pyramid (0: samples) */
  walk(segment: number, level: number, from: number, to: number, visitor: Visitor): void;
}

interface BlockRow {
  block: number;
  samples: number;
  times: Uint8Array;
  data: Uint8Array;
}

/** A reader over an open database. */
export function createSampleReader(database: Database): SampleReader {
  const findSeries = database.prepare('SELECT id FROM series WHERE kind = ? AND name = ?').pluck();
  const segments = database.prepare(
    `SELECT id, ordinal, samples, first, last, EXISTS (SELECT 1 FROM blocks WHERE segment = segments.id) AS kept
     FROM segments WHERE series = ? AND samples > 0 ORDER BY ordinal, id`,
  );
  const blocks = database.prepare(
    'SELECT block, samples, times, data FROM blocks WHERE segment = ? AND block BETWEEN ? AND ? ORDER BY block',
  );
  const blockAt = database.prepare(
    'SELECT block, samples, times, data FROM blocks WHERE segment = ? AND first <= ? ORDER BY first DESC LIMIT 1',
  );
  const nodeRows = database.prepare(
    'SELECT block, nodes FROM pyramid WHERE segment = ? AND level = ? AND block BETWEEN ? AND ? ORDER BY block',
  );
  const scratch = new Float64Array(BLOCK_SAMPLES);

  const eachBlock = (
    segment: number,
    from: number,
    to: number,
    use: (row: BlockRow, from: number, to: number) => void,
  ) => {
    if (from >= to) return;
    const range = [Math.floor(from / BLOCK_SAMPLES), Math.floor((to - 1) / BLOCK_SAMPLES)];
    for (const row of blocks.iterate(segment, ...range) as IterableIterator<BlockRow>) {
      const start = row.block * BLOCK_SAMPLES;
      use(row, Math.max(0, from - start), Math.min(row.samples, to - start));
    }
  };

  const timesOf = (row: BlockRow): Float64Array => {
    const numbers = fromBlob(row.times);
    readTimesInto(numbers, numbers.length, scratch, 0);
    return scratch;
  };

  const walkSamples = (segment: number, from: number, to: number, visitor: Visitor): void => {
    let next = Math.floor(from / BLOCK_SAMPLES);
    eachBlock(segment, from, to, (row, a, b) => {
      if (row.block > next) visitor.missing();
      next = row.block + 1;
      const times = timesOf(row);
      const values = fromBlob(row.data);
      for (let i = a; i < b; i++) {
        const value = values[i]!;
        if (Number.isFinite(value)) visitor.take(times[i]!, times[i]!, value, value, 1);
        else visitor.missing();
      }
    });
    if (next * BLOCK_SAMPLES < to) visitor.missing();
  };

  const walkNodes = (segment: number, level: number, from: number, to: number, visitor: Visitor): void => {
    const size = FAN_OUT ** level;
    // all rows at once: a walk goes down inside this loop and shares the statement
    const rows = nodeRows.all(segment, level, Math.floor(from / FAN_OUT), Math.floor((to - 1) / FAN_OUT)) as {
      block: number;
      nodes: Uint8Array;
    }[];
    let next = Math.floor(from / FAN_OUT);
    for (const row of rows) {
      // rows that are not there were pruned
      if (row.block > next) visitor.missing();
      next = row.block + 1;
      const nodes = fromBlob(row.nodes);
      const start = row.block * FAN_OUT;
      const end = Math.min(to - start, nodes.length / NODE_NUMBERS);
      for (let n = Math.max(0, from - start); n < end; n++) {
        const at = n * NODE_NUMBERS;
        const [first, last] = [nodes[at]!, nodes[at + 1]!];
        if (Number.isNaN(first)) visitor.missing();
        else if (visitor.splits(first, last))
          walk(segment, level - 1, (start + n) * size, (start + n + 1) * size, visitor);
        else visitor.take(first, last, nodes[at + 2]!, nodes[at + 3]!, size);
      }
    }
    if (next * FAN_OUT < to) visitor.missing();
  };

  const walk = (segment: number, level: number, from: number, to: number, visitor: Visitor): void => {
    if (from >= to) return;
    if (level === 0) {
      walkSamples(segment, from, to, visitor);
      return;
    }
    const size = FAN_OUT ** level;
    const a = Math.ceil(from / size);
    const b = Math.floor(to / size);
    if (a >= b) {
      walk(segment, level - 1, from, to, visitor);
      return;
    }
    walk(segment, level - 1, from, a * size, visitor);
    walkNodes(segment, level, a, b, visitor);
    walk(segment, level - 1, b * size, to, visitor);
  };

  /** samples of the segment before time t, or up to and with it */
  const countBefore = (segment: Segment, t: number, including: boolean): number => {
    const row = blockAt.get(segment.id, t) as BlockRow | undefined;
    if (row === undefined) return 0;
    const times = timesOf(row);
    let low = 0;
    let high = row.samples;
    while (low < high) {
      const middle = (low + high) >> 1;
      if (times[middle]! < t || (including && times[middle] === t)) low = middle + 1;
      else high = middle;
    }
    return row.block * BLOCK_SAMPLES + low;
  };

  return {
    findSeries: (kind, name) => (findSeries.get(kind, name) as number | undefined) ?? null,
    segments: (series) => segments.all(series) as Segment[],
    readInto: (segment, from, to, times, values, at) => {
      let filled = at;
      eachBlock(segment.id, from, to, (row, a, b) => {
        times.set(timesOf(row).subarray(a, b), filled);
        copyBlob(row.data, a, b, values, filled);
        filled += b - a;
      });
    },
    rangeOf: (span) => ({
      from: countBefore(span.segment, span.from, span.fromOpen),
      to: countBefore(span.segment, span.to, !span.toOpen),
    }),
    walk,
  };
}
