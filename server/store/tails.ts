import type { Database } from 'better-sqlite3';
import { fromBlob, toBlob } from './blobs.ts';
import { addSampleNode, BLOCK_SAMPLES, createOpenLevel, FAN_OUT, type OpenLevel } from './pyramid.ts';
import {
  addTimes,
  createTimePieces,
  frameTime,
  readTimesInto,
  resumeTimePieces,
  type TimePieces,
} from './sampleTimes.ts';
import type { FrameToStore } from './store.ts';
import { StoreError } from './storeError.ts';

/** What kind of series: what a channel measured, or the variable of a watch. */
export type SeriesKind = 'channel' | 'trace';

/** Samples as they are appended: a frame without its envelope. */
export type Samples = Pick<FrameToStore, 't0' | 'dt' | 'times' | 'values'>;

/** A series' newest segment in memory: its unfinished block and pyramid rows, and what is to be written of them. */
interface Tail {
  series: number;
  /** totals of the series */
  total: number;
  seriesFirst: number;
  newestValue: number | null;
  /** the segment: its row (0 before the first sample), ordinal of its first sample, samples, first and last time */
  segment: number;
  ordinal: number;
  samples: number;
  first: number;
  last: number;
  /** the unfinished block: the first samples % BLOCK_SAMPLES entries are valid */
  times: Float64Array;
  values: Float64Array;
  pieces: TimePieces;
  levels: OpenLevel[];
  dirty: boolean;
}

/** Appends samples to series; what is unfinished stays in memory until `flush` writes it. */
export interface Tails {
  /** the row of a series, made where missing */
  series(kind: SeriesKind, name: string): number;
  /** @throws StoreError FAILED where the times of samples do not ascend */
  check(name: string, samples: Samples): void;
  /** appends samples that were checked */
  append(kind: SeriesKind, name: string, samples: Samples): void;
  /** writes everything unfinished, so that SQL sees it */
  flush(): void;
  /** forgets what is in memory: after a rollback the database alone is right */
  forget(): void;
  /** forgets one series, which was written and has changed in the database since */
  readAnew(series: number): void;
}

/** Tails over an open, migrated database; the caller holds the transaction. */
export function createTails(database: Database): Tails {
  const tails = new Map<string, Tail>();
  const dirty = new Set<Tail>();
  const sql = prepare(database);

  const series = (kind: SeriesKind, name: string): number => {
    const found = sql.findSeries.get(kind, name) as { id: number } | undefined;
    return found?.id ?? Number(sql.addSeries.run(kind, name).lastInsertRowid);
  };

  const tailOf = (kind: SeriesKind, name: string): Tail => {
    const key = `${kind}/${name}`;
    let tail = tails.get(key);
    if (tail === undefined) tails.set(key, (tail = loadTail(sql, series(kind, name))));
    return tail;
  };

  const writeRow = (tail: Tail) => (level: number, row: OpenLevel) =>
    sql.putNodes.run(tail.segment, level, row.block, toBlob(row.nodes, row.count * 4));

  const flushTail = (tail: Tail): void => {
    const open = tail.samples % BLOCK_SAMPLES;
    if (open > 0) writeBlock(sql, tail, open);
    tail.levels.forEach((row, index) => {
      if (row.dirty) writeRow(tail)(index + 1, row);
      row.dirty = false;
    });
    if (tail.segment > 0) sql.putSegment.run(tail.samples, tail.last, tail.segment);
    sql.putTotals.run(tail.total, tail.seriesFirst, tail.last, tail.newestValue, tail.series);
    tail.dirty = false;
  };

  const append = (kind: SeriesKind, name: string, samples: Samples): void => {
    const count = samples.values.length;
    if (count === 0) return;
    const tail = tailOf(kind, name);
    dirty.add(tail);
    tail.dirty = true;
    if (tail.segment === 0 || frameTime(samples, 0) <= tail.last) {
      if (tail.segment > 0) flushTail(tail);
      beginSegment(sql, tail, frameTime(samples, 0));
      tail.dirty = true;
    }
    for (let from = 0; from < count; ) from += fillBlock(sql, tail, samples, from, writeRow(tail));
    tail.total += count;
    noteNewest(tail, samples);
  };

  return {
    series,
    check: refuseUnordered,
    append,
    flush: () => {
      for (const tail of dirty) if (tail.dirty) flushTail(tail);
      dirty.clear();
    },
    forget: () => {
      tails.clear();
      dirty.clear();
    },
    readAnew: (series) => {
      for (const [key, tail] of tails) if (tail.series === series) tails.delete(key);
    },
  };
}

function prepare(database: Database) {
  return {
    findSeries: database.prepare('SELECT id FROM series WHERE kind = ? AND name = ?'),
    addSeries: database.prepare('INSERT INTO series (kind, name) VALUES (?, ?)'),
    totals: database.prepare('SELECT samples, first, value FROM series WHERE id = ?'),
    putTotals: database.prepare(
      'UPDATE series SET samples = ?, first = ?, newest = ?, value = ? WHERE id = ?',
    ),
    lastSegment: database.prepare(
      'SELECT * FROM segments WHERE series = ? ORDER BY ordinal DESC, id DESC LIMIT 1',
    ),
    addSegment: database.prepare(
      'INSERT INTO segments (series, ordinal, samples, first, last) VALUES (?, ?, 0, ?, ?)',
    ),
    putSegment: database.prepare('UPDATE segments SET samples = ?, last = ? WHERE id = ?'),
    block: database.prepare('SELECT times, data FROM blocks WHERE segment = ? AND block = ?'),
    putBlock: database.prepare(
      `INSERT INTO blocks (segment, block, first, samples, times, data) VALUES (?, ?, ?, ?, ?, ?)
       ON CONFLICT (segment, block) DO UPDATE SET samples = excluded.samples, times = excluded.times, data = excluded.data`,
    ),
    nodes: database.prepare('SELECT nodes FROM pyramid WHERE segment = ? AND level = ? AND block = ?'),
    putNodes: database.prepare(
      `INSERT INTO pyramid (segment, level, block, nodes) VALUES (?, ?, ?, ?)
       ON CONFLICT (segment, level, block) DO UPDATE SET nodes = excluded.nodes`,
    ),
  };
}

type Sql = ReturnType<typeof prepare>;

function loadTail(sql: Sql, series: number): Tail {
  const totals = sql.totals.get(series) as { samples: number; first: number | null; value: number | null };
  const segment = sql.lastSegment.get(series) as
    | { id: number; ordinal: number; samples: number; first: number; last: number }
    | undefined;
  const tail: Tail = {
    series,
    total: totals.samples,
    seriesFirst: totals.first ?? Number.POSITIVE_INFINITY,
    newestValue: totals.value,
    segment: segment?.id ?? 0,
    ordinal: segment?.ordinal ?? 0,
    samples: segment?.samples ?? 0,
    first: segment?.first ?? 0,
    last: segment?.last ?? 0,
    times: new Float64Array(BLOCK_SAMPLES),
    values: new Float64Array(BLOCK_SAMPLES),
    pieces: createTimePieces(BLOCK_SAMPLES),
    levels: [],
    dirty: false,
  };
  loadBlock(sql, tail);
  loadLevels(sql, tail);
  return tail;
}

function loadBlock(sql: Sql, tail: Tail): void {
  if (tail.samples % BLOCK_SAMPLES === 0) return;
  const row = sql.block.get(tail.segment, Math.floor(tail.samples / BLOCK_SAMPLES)) as {
    times: Uint8Array;
    data: Uint8Array;
  };
  tail.values.set(fromBlob(row.data));
  tail.pieces = resumeTimePieces(fromBlob(row.times), BLOCK_SAMPLES);
  readTimesInto(tail.pieces.numbers, tail.pieces.used, tail.times, 0);
}

function loadLevels(sql: Sql, tail: Tail): void {
  let complete = Math.floor(tail.samples / FAN_OUT);
  for (let level = 1; complete > 0; level++, complete = Math.floor(complete / FAN_OUT)) {
    const row = createOpenLevel(Math.floor(complete / FAN_OUT));
    row.count = complete % FAN_OUT;
    const stored = sql.nodes.get(tail.segment, level, row.block) as { nodes: Uint8Array } | undefined;
    if (row.count > 0 && stored !== undefined) row.nodes.set(fromBlob(stored.nodes));
    tail.levels.push(row);
  }
}

function beginSegment(sql: Sql, tail: Tail, first: number): void {
  tail.segment = Number(sql.addSegment.run(tail.series, tail.total, first, first).lastInsertRowid);
  tail.ordinal = tail.total;
  tail.samples = 0;
  tail.first = first;
  tail.pieces = createTimePieces(BLOCK_SAMPLES);
  tail.levels = [];
}

function writeBlock(sql: Sql, tail: Tail, count: number): void {
  const block = Math.floor((tail.samples - 1) / BLOCK_SAMPLES);
  const { pieces } = tail;
  sql.putBlock.run(
    tail.segment,
    block,
    tail.times[0],
    count,
    toBlob(pieces.numbers, pieces.used),
    toBlob(tail.values, count),
  );
}

function fillBlock(
  sql: Sql,
  tail: Tail,
  samples: Samples,
  from: number,
  writeRow: (level: number, row: OpenLevel) => void,
): number {
  const at = tail.samples % BLOCK_SAMPLES;
  const count = Math.min(samples.values.length - from, BLOCK_SAMPLES - at);
  tail.values.set(samples.values.subarray(from, from + count), at);
  for (let i = 0; i < count; i++) tail.times[at + i] = frameTime(samples, from + i);
  addTimes(tail.pieces, samples, from, count);
  tail.samples += count;
  const complete = Math.floor((at + count) / FAN_OUT);
  for (let node = Math.floor(at / FAN_OUT); node < complete; node++)
    addSampleNode(tail.levels, tail.times, tail.values, node * FAN_OUT, writeRow);
  if (at + count === BLOCK_SAMPLES) {
    writeBlock(sql, tail, BLOCK_SAMPLES);
    tail.pieces.used = 0;
    tail.pieces.last = -1;
  }
  return count;
}

function noteNewest(tail: Tail, samples: Samples): void {
  tail.last = frameTime(samples, samples.values.length - 1);
  tail.seriesFirst = Math.min(tail.seriesFirst, tail.first);
  for (let i = samples.values.length - 1; i >= 0; i--)
    if (Number.isFinite(samples.values[i]!)) {
      tail.newestValue = samples.values[i]!;
      return;
    }
}

function refuseUnordered(name: string, samples: Samples): void {
  const { t0, dt, times, values } = samples;
  let ascending = times === null ? Number.isFinite(t0) && (values.length === 1 || dt > 0) : true;
  if (times !== null) {
    ascending = times.length === values.length && Number.isFinite(times[0]) && Number.isFinite(times.at(-1));
    for (let i = 1; ascending && i < times.length; i++) ascending = times[i]! > times[i - 1]!;
  }
  if (!ascending)
    throw new StoreError(
      'FAILED',
      `a frame of ${name} has times that do not ascend; expected each sample after the one before it; ` +
        'the frame was not stored, check its times',
    );
}
