import { createProjection, projectInto } from '../embedding/projection.ts';
import { lineInto } from '../embedding/runs.ts';
import { STENCIL } from './derivative.ts';

/** Windows projected at a time, at most. */
export const BLOCK = 2048;

/** What a walk over a recording needs of a model. */
export interface Coordinates {
  channels: { mean: number }[];
  delays: number;
  rank: number;
  /** as in Model.coordinates */
  coordinates: Float64Array;
}

/** Consecutive windows of one run. All arrays are reused from block to block. */
export interface CoordinateBlock {
  /** windows in this block */
  count: number;
  /** the first window that no earlier block held: blocks of a run overlap, for stencils that reach both ways */
  fresh: number;
  /** windows of the whole recording before the block's first */
  ordinal: number;
  /** count × rank, row-major */
  values: Float64Array;
  /** centred samples of each channel; the newest of window i is at delays − 1 + i */
  lines: Float64Array[];
}

/**
 * Walks through the delay coordinates of all windows of all runs, a block at a time, so that no matrix of
 * windows × rank is held. Blocks of one run overlap by four windows.
 *
 * @param runs as in fitModel; runs shorter than `delays` hold no window
 */
export function walkCoordinates(
  runs: readonly (readonly Float64Array[])[],
  of: Coordinates,
  visit: (block: CoordinateBlock) => void,
): void {
  const { delays, rank } = of;
  const overlap = 2 * STENCIL;
  const projection = createProjection(of.coordinates, of.channels.length, delays, rank);
  const lines = of.channels.map(() => new Float64Array(BLOCK + delays - 1));
  const values = new Float64Array(BLOCK * rank);
  const block: CoordinateBlock = { count: 0, fresh: 0, ordinal: 0, values, lines };
  let before = 0;
  for (const run of runs) {
    const windows = Math.max(0, run[0]!.length - delays + 1);
    for (let first = 0; first < windows; first += BLOCK - overlap) {
      if (first > 0 && first + overlap >= windows) break;
      block.count = Math.min(BLOCK, windows - first);
      block.fresh = first === 0 ? 0 : overlap;
      block.ordinal = before + first;
      for (let c = 0; c < lines.length; c++) {
        lineInto(run[c]!, first, block.count + delays - 1, of.channels[c]!.mean, 1, lines[c]!);
      }
      projectInto(projection, lines, delays - 1, block.count, values);
      visit(block);
    }
    before += windows;
  }
}
