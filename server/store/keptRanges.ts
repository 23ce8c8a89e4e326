import type { Database } from 'better-sqlite3';
import { hasPruneTables } from './pruneTables.ts';
import { BLOCK_SAMPLES } from './pyramid.ts';
import type { Segment } from './spans.ts';

/** A stretch of a segment's samples [from, to) that is there or was pruned. */
export type Piece =
  | { pruned: false; from: number; to: number }
  /** recordings that began in it; time of its newest finite sample, null without one */
  | { pruned: true; from: number; to: number; recordings: number; last: number | null };

interface PrunedRow {
  block: number;
  blocks: number;
  recordings: number;
  last: number | null;
}

/** Tells of segments which of their samples are still there. */
export interface KeptRanges {
  /** all of a segment in order, what was pruned and what was not; no two pruned ones touch */
  pieces(segment: Segment): Piece[];
  /** what is there of a segment's samples [from, to), in order, none empty */
  kept(segment: Segment, from: number, to: number): { from: number; to: number }[];
}

/** Kept ranges of an open database, of any version that is read. */
export function createKeptRanges(database: Database): KeptRanges {
  const rows = hasPruneTables(database)
    ? database.prepare('SELECT block, blocks, recordings, last FROM pruned WHERE segment = ? ORDER BY block')
    : null;
  const pieces = (segment: Segment): Piece[] => {
    const found: Piece[] = [];
    let at = 0;
    for (const { block, blocks, recordings, last } of (rows?.all(segment.id) ?? []) as PrunedRow[]) {
      const from = block * BLOCK_SAMPLES;
      if (from > at) found.push({ pruned: false, from: at, to: from });
      at = Math.min(segment.samples, from + blocks * BLOCK_SAMPLES);
      found.push({ pruned: true, from, to: at, recordings, last });
    }
    if (at < segment.samples) found.push({ pruned: false, from: at, to: segment.samples });
    return found;
  };
  return {
    pieces,
    kept: (segment, from, to) =>
      pieces(segment)
        .filter((piece) => !piece.pruned)
        .map((piece) => ({ from: Math.max(piece.from, from), to: Math.min(piece.to, to) }))
        .filter((range) => range.from < range.to),
  };
}
