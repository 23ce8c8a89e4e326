import type { Database } from 'better-sqlite3';
import { fromBlob, toBlob } from './blobs.ts';
import { FAN_OUT, NODE_NUMBERS, parentNodeInto } from './pyramid.ts';

/**
 * Takes a block out of a segment's min/max pyramid: its row of level 1 goes, and the nodes over it tell of what is
 * left under them. A complete row under which nothing is left goes too.
 *
 * @returns a function of the segment's row and the block; the caller holds the transaction
 */
export function prunePyramid(database: Database): (segment: number, block: number) => void {
  const get = database
    .prepare('SELECT nodes FROM pyramid WHERE segment = ? AND level = ? AND block = ?')
    .pluck();
  const put = database.prepare('UPDATE pyramid SET nodes = ? WHERE segment = ? AND level = ? AND block = ?');
  const remove = database.prepare('DELETE FROM pyramid WHERE segment = ? AND level = ? AND block = ?');
  return (segment, block) => {
    remove.run(segment, 1, block);
    const node = new Float64Array(NODE_NUMBERS).fill(Number.NaN);
    let place = block;
    for (let level = 2; ; level++) {
      const row = Math.floor(place / FAN_OUT);
      const stored = get.get(segment, level, row) as Uint8Array | undefined;
      const at = (place % FAN_OUT) * NODE_NUMBERS;
      const nodes = stored === undefined ? null : fromBlob(stored);
      // a node that is not there yet tells of nothing
      if (nodes === null || at >= nodes.length) return;
      nodes.set(node, at);
      const complete = nodes.length === FAN_OUT * NODE_NUMBERS;
      if (complete && nodes.every(Number.isNaN)) remove.run(segment, level, row);
      else put.run(toBlob(nodes, nodes.length), segment, level, row);
      if (!complete) return;
      parentNodeInto(nodes, node, 0);
      place = row;
    }
  };
}
