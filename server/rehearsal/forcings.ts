import type { RehearsalRequest } from '../../shared-types/rehearsal.ts';
import { hankelVectors } from '../embedding/hankelVectors.ts';
import { chooseRank } from '../embedding/rankChoice.ts';
import { addToMoments, createMoments, deviationOf, meanOf } from '../signal/statistics.ts';
import { ranksToTry } from './toTry.ts';
import type { Projected } from './trace.ts';

/** Samples of which singular vectors are found in a search, at most; the chosen pair is fitted to all of them. */
const MOST_SAMPLES = 200_000;
/** Pieces in which a longer part is read, spread evenly over it. */
const PIECES = 16;
/** s_k/s_1 below which a search does not look: there only the slow factorisation would see. */
const DEPTH = 1e-10;

/** The forcing of one window and rank: a projection whose only coordinate it is. */
export interface Forcing {
  delays: number;
  rank: number;
  projected: Projected;
}

/**
 * The forcings of one window at all ranks to try, from one factorisation: the last coordinate at rank r is the r-th
 * singular vector, scaled to unit rms.
 *
 * @param runs runs[i][c]: the tuning part; windows never cross runs
 */
export function forcingsOf(
  runs: readonly (readonly Float64Array[])[],
  delays: number,
  request: Pick<RehearsalRequest, 'ranks'>,
): Forcing[] {
  const pieces = thinned(runs, delays);
  const channels = pieces[0]!.map((_, c) => momentsOf(runs, c));
  const weights = Float64Array.from(channels, ({ scale }) => (channels.length === 1 ? 1 : 1 / scale));
  const stacked = { samples: pieces, means: Float64Array.from(channels, ({ mean }) => mean), weights };
  let ranks: number[] = [];
  const found = hankelVectors(stacked, delays, (singularValues, windows) => {
    const floor = chooseRank(singularValues, windows).rank;
    const deep = singularValues.filter((s) => s > DEPTH * singularValues[0]!).length;
    ranks = ranksToTry(request, singularValues.length, floor).filter(
      (rank) => rank <= deep || request.ranks !== null,
    );
    return Math.max(1, ...ranks.filter((rank) => rank <= deep));
  });
  const { rows, windows, vectors, singularValues } = found;
  return ranks
    .filter((rank) => rank <= found.found)
    .map((rank) => {
      const scale = Math.sqrt(windows) / singularValues[rank - 1]!;
      const coordinates = new Float64Array(rows);
      for (let row = 0; row < rows; row++) {
        coordinates[row] = scale * vectors[(rank - 1) * rows + row]! * weights[Math.floor(row / delays)]!;
      }
      return { delays, rank, projected: { coordinates, delays, rank: 1, channels } };
    });
}

function momentsOf(runs: readonly (readonly Float64Array[])[], c: number): { mean: number; scale: number } {
  const moments = createMoments();
  for (const run of runs) for (let i = 0; i < run[c]!.length; i++) addToMoments(moments, run[c]![i]!);
  return { mean: meanOf(moments), scale: deviationOf(moments) };
}

/** Runs long enough for a window; where they are long together, pieces of them spread evenly. */
function thinned(runs: readonly (readonly Float64Array[])[], delays: number): (readonly Float64Array[])[] {
  const long = runs.filter((run) => run[0]!.length >= delays);
  const samples = long.reduce((sum, run) => sum + run[0]!.length, 0);
  if (samples <= MOST_SAMPLES) return long;
  return long.flatMap((run) => {
    const { length } = run[0]!;
    const share = (MOST_SAMPLES / samples) * length;
    const piece = Math.max(delays, Math.floor(share / PIECES));
    const pieces = Math.max(1, Math.min(PIECES, Math.floor(length / piece)));
    return Array.from({ length: pieces }, (_, i) => {
      const from = Math.floor((i * (length - piece)) / Math.max(1, pieces - 1));
      return run.map((values) => values.subarray(from, from + piece));
    });
  });
}
