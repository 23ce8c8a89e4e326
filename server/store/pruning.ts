import type { Database } from 'better-sqlite3';
import { createPrunedStretches } from './prunedStretches.ts';
import { prunePyramid } from './prunePyramid.ts';
import type { PruneRules, PruneStep } from './pruneRules.ts';
import { BLOCK_SAMPLES } from './pyramid.ts';

/** Gives up the oldest samples in small steps. */
export interface Pruner {
  /** one step; what is unfinished in memory was written before, and `touched` series are to be read anew */
  step(rules: PruneRules, touched: (series: number) => void): PruneStep;
  /** notes now and then when what is stored next arrives */
  noteArrival(now: number): void;
  /** after a rollback: where it was is not known any more */
  forget(): void;
}

/** Blocks looked at and given up in a step: a few milliseconds. */
const LOOKED_AT = 256;
const MOST_BLOCKS = 64;
/** The ceiling is held with so much to spare, for the log beside the database and what arrives until the next step. */
const SPARE_BYTES = 24 * 1024 * 1024;
/** A block takes at least so many bytes. */
const BLOCK_BYTES = BLOCK_SAMPLES * 8;
/** Free pages given back to the disk in a step. */
const PAGES_BACK = 256;
/** Free space of this share and size is left for what comes next when there is no ceiling. */
const FREE_SHARE = 0.25;
const FREE_BYTES = 64 * 1024 * 1024;
/** What could not go is looked at again after so many seconds. */
const LOOK_AGAIN_SECONDS = 600;
/** Seconds between notes of arrival: a block may stay by so much longer than it had to. */
const ARRIVAL_SECONDS = 600;

/** A full block that may be a candidate, with the beginning of what came after it in its segment. */
interface Candidate {
  id: number;
  segment: number;
  block: number;
  first: number;
  samples: number;
  series: number;
  kind: 'channel' | 'trace';
  name: string;
  ordinal: number;
  segmentSamples: number;
  segmentLast: number;
}

/** A pruner over an open, migrated database; the caller holds the transaction. */
export function createPruner(database: Database): Pruner {
  const sql = prepare(database);
  const stretches = createPrunedStretches(database);
  const pyramid = prunePyramid(database);
  let cursor = 0;
  let cursorSince = Number.NEGATIVE_INFINITY;
  let arrivalNoted = Number.NEGATIVE_INFINITY;

  const sizes = () => {
    const page = database.pragma('page_size', { simple: true }) as number;
    const pages = database.pragma('page_count', { simple: true }) as number;
    const free = database.pragma('freelist_count', { simple: true }) as number;
    return { page, free, fileBytes: pages * page, usedBytes: (pages - free) * page };
  };

  /** what follows the block in its series: the id and first time of the next block; null for the newest */
  const following = (one: Candidate): { id: number; first: number } | null =>
    (sql.nextBlock.get(one.segment, one.block) ?? sql.nextSegment.get(one.series, one.segment) ?? null) as {
      id: number;
      first: number;
    } | null;

  const mayGo = (one: Candidate, rules: PruneRules): boolean => {
    const { first, name, kind } = one;
    const after = sql.nextBlock.get(one.segment, one.block) as { first: number } | undefined;
    const last = after?.first ?? one.segmentLast;
    const overlaps = (from: number, to: number) => first <= to && last >= from;
    const end = one.ordinal + one.block * BLOCK_SAMPLES + one.samples;
    if (kind === 'channel') {
      if (rules.needed.some(({ channel, ordinal }) => channel === name && end > ordinal)) return false;
      if (rules.stretches.some(({ channel, from, to }) => channel === name && overlaps(from, to)))
        return false;
    }
    return !rules.switches.some(
      (pin) =>
        (kind === 'trace' ? pin.watch === name : pin.channels.includes(name)) &&
        sql.switchWithin.get(pin.watch, first - pin.after, last + pin.before) !== undefined,
    );
  };

  const giveUp = (one: Candidate, recordingGap: number): void => {
    stretches.add(one.segment, one.block, recordingGap);
    sql.removeBlock.run(one.id);
    pyramid(one.segment, one.block);
    const next = sql.firstBlock.get(one.segment) as { first: number } | undefined;
    if (next !== undefined) sql.putFirst.run(next.first, one.segment);
  };

  const step: Pruner['step'] = (rules, touched) => {
    if (rules.now - cursorSince > LOOK_AGAIN_SECONDS || rules.now < cursorSince) {
      cursor = 0;
      cursorSince = rules.now;
    }
    const tooOld =
      rules.keepFor === null
        ? 0
        : ((sql.arrivedBy.get(rules.now - rules.keepFor) as number | undefined) ?? 0);
    if (tooOld > 0) sql.forgetArrivals.run(tooOld);
    let over = rules.largestBytes === null ? 0 : sizes().usedBytes + SPARE_BYTES - rules.largestBytes;
    const channels = new Set<string>();
    let [looked, given, samples, ended] = [0, 0, 0, false];
    const candidates = sql.candidates.all(cursor, LOOKED_AT) as Candidate[];
    for (const one of candidates) {
      if (given === MOST_BLOCKS || !(over > 0 || one.id < tooOld)) break;
      looked++;
      cursor = one.id;
      const next = following(one);
      if (next === null || !(over > 0 || next.id < tooOld) || !mayGo(one, rules)) continue;
      giveUp(one, rules.recordingGap);
      touched(one.series);
      if (one.kind === 'channel') channels.add(one.name);
      samples += one.kind === 'channel' ? one.samples : 0;
      given++;
      over -= BLOCK_BYTES;
    }
    ended = looked === candidates.length && candidates.length < LOOKED_AT;
    const returned = giveBack(rules.largestBytes);
    const { fileBytes, usedBytes } = sizes();
    const short = rules.largestBytes === null ? 0 : Math.max(0, usedBytes - rules.largestBytes);
    return {
      samples,
      channels: [...channels],
      usedBytes,
      fileBytes,
      more: returned || (!ended && (given > 0 || looked === LOOKED_AT)),
      short: ended ? short : 0,
    };
  };

  const giveBack = (largestBytes: number | null): boolean => {
    const { page, free, fileBytes } = sizes();
    const tooLarge = largestBytes !== null && fileBytes + SPARE_BYTES / 2 > largestBytes;
    const idle = free * page > Math.max(FREE_BYTES, FREE_SHARE * fileBytes);
    if (!(free > 0 && (tooLarge || idle))) return false;
    database.pragma(`incremental_vacuum(${PAGES_BACK})`);
    return sizes().fileBytes < fileBytes;
  };

  return {
    step,
    noteArrival: (now) => {
      if (now - arrivalNoted < ARRIVAL_SECONDS) return;
      sql.noteArrival.run(now);
      arrivalNoted = now;
    },
    forget: () => {
      cursor = 0;
      arrivalNoted = Number.NEGATIVE_INFINITY;
    },
  };
}

function prepare(database: Database) {
  return {
    candidates: database.prepare(
      `SELECT b.id, b.segment, b.block, b.first, b.samples, s.series, x.kind, x.name, s.ordinal,
         s.samples AS segmentSamples, s.last AS segmentLast
       FROM blocks b JOIN segments s ON s.id = b.segment JOIN series x ON x.id = s.series
       WHERE b.id > ? ORDER BY b.id LIMIT ?`,
    ),
    nextBlock: database.prepare(
      'SELECT id, first FROM blocks WHERE segment = ? AND block > ? ORDER BY block LIMIT 1',
    ),
    nextSegment: database.prepare(
      `SELECT b.id, b.first FROM segments s JOIN blocks b ON b.segment = s.id
       WHERE s.series = ? AND s.id > ? ORDER BY s.id, b.block LIMIT 1`,
    ),
    firstBlock: database.prepare('SELECT first FROM blocks WHERE segment = ? ORDER BY block LIMIT 1'),
    removeBlock: database.prepare('DELETE FROM blocks WHERE id = ?'),
    putFirst: database.prepare('UPDATE segments SET first = ? WHERE id = ?'),
    switchWithin: database.prepare('SELECT 1 FROM switches WHERE watch = ? AND at BETWEEN ? AND ? LIMIT 1'),
    arrivedBy: database.prepare('SELECT id FROM arrivals WHERE at <= ? ORDER BY id DESC LIMIT 1').pluck(),
    forgetArrivals: database.prepare('DELETE FROM arrivals WHERE id < ?'),
    noteArrival: database.prepare(
      `INSERT INTO arrivals (id, at) SELECT coalesce(max(id), 0) + 1, ? FROM blocks WHERE true
       ON CONFLICT (id) DO NOTHING`,
    ),
  };
}
