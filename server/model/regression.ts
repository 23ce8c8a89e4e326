import { type Coordinates, walkCoordinates } from './coordinateBlocks.ts';
import { derivativeInto, STENCIL } from './derivative.ts';
import { addRows, addSums, createNormalSums, type NormalSums } from './leastSquares.ts';

/**
 * Sums of the regression of dv/dt on v over all windows whose stencil stays within their run: predictors and targets
 * are all `rank` coordinates. Rows 1 … rank − 1 of the solution are [A B] of the model dv/dt = A·v + B·v_r.
 *
 * @param interval seconds between windows
 * @param parts    only windows with from ≤ ordinal < to, where the ordinal counts the windows of the recording
 * @see Brunton, Brunton, Proctor, Kaiser and Kutz 2017, Nature Communications 8:19
 */
export function regressionSums(
  runs: readonly (readonly Float64Array[])[],
  of: Coordinates,
  interval: number,
  parts: readonly { from: number; to: number }[] = [{ from: 0, to: Number.POSITIVE_INFINITY }],
): NormalSums[] {
  const { rank } = of;
  const totals = parts.map(() => createNormalSums(rank, rank));
  let slopes = new Float64Array(0);
  walkCoordinates(runs, of, (block) => {
    const rows = block.count - 2 * STENCIL;
    if (rows < 1) return;
    if (slopes.length < rows * rank) slopes = new Float64Array(block.values.length);
    derivativeInto(block.values, block.count, rank, interval, slopes);
    const centres = block.values.subarray(STENCIL * rank);
    parts.forEach((part, i) => {
      const from = Math.max(0, part.from - block.ordinal - STENCIL);
      const to = Math.min(rows, part.to - block.ordinal - STENCIL);
      // block by block first: fewer roundings in the long sums
      const sums = createNormalSums(rank, rank);
      addRows(sums, centres, slopes, from, to);
      addSums(totals[i]!, sums);
    });
  });
  return totals;
}
