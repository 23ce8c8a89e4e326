import type { Database } from 'better-sqlite3';
import { fromBlob } from './blobs.ts';
import { BLOCK_SAMPLES } from './pyramid.ts';
import { readTimesInto } from './sampleTimes.ts';

interface Stretch {
  block: number;
  blocks: number;
  recordings: number;
  last: number | null;
}

/** Keeps the book of what was pruned; see `pruneTables.ts`. */
export interface PrunedStretches {
  /** notes that a block, still there, is about to go; `gap`: seconds that part recordings */
  add(segment: number, block: number, gap: number): void;
}

/** Pruned stretches of an open, migrated database; the caller holds the transaction. */
export function createPrunedStretches(database: Database): PrunedStretches {
  const blockAt = database.prepare('SELECT times, data FROM blocks WHERE segment = ? AND block = ?');
  const before = database.prepare(
    'SELECT block, blocks, recordings, last FROM pruned WHERE segment = ? AND block < ? ORDER BY block DESC LIMIT 1',
  );
  const after = database.prepare(
    'SELECT block, blocks, recordings, last FROM pruned WHERE segment = ? AND block = ?',
  );
  const remove = database.prepare('DELETE FROM pruned WHERE segment = ? AND block = ?');
  const put = database.prepare(
    'INSERT OR REPLACE INTO pruned (segment, block, blocks, recordings, last) VALUES (?, ?, ?, ?, ?)',
  );
  const times = new Float64Array(BLOCK_SAMPLES);

  /** calls `use` with the time of each finite sample of a block that is there */
  const eachFinite = (segment: number, block: number, use: (time: number) => void): void => {
    const row = blockAt.get(segment, block) as { times: Uint8Array; data: Uint8Array } | undefined;
    if (row === undefined) return;
    const numbers = fromBlob(row.times);
    const values = fromBlob(row.data);
    readTimesInto(numbers, numbers.length, times, 0);
    for (let i = 0; i < values.length; i++) if (Number.isFinite(values[i]!)) use(times[i]!);
  };

  const lastBefore = (segment: number, block: number): number | null => {
    let last: number | null = null;
    if (block > 0) eachFinite(segment, block - 1, (time) => void (last = time));
    return last;
  };

  return {
    add: (segment, block, gap) => {
      const found = before.get(segment, block) as Stretch | undefined;
      const touching = found !== undefined && found.block + found.blocks === block ? found : null;
      const joined: Stretch = touching ?? { block, blocks: 0, recordings: 0, last: null };
      let last = touching === null ? lastBefore(segment, block) : touching.last;
      eachFinite(segment, block, (time) => {
        if (last === null || time - last > gap) joined.recordings++;
        joined.last = last = time;
      });
      joined.blocks++;
      const next = after.get(segment, block + 1) as Stretch | undefined;
      if (next !== undefined) {
        remove.run(segment, next.block);
        joined.blocks += next.blocks;
        joined.recordings += next.recordings;
        joined.last = next.last ?? joined.last;
      }
      put.run(segment, joined.block, joined.blocks, joined.recordings, joined.last);
    },
  };
}
