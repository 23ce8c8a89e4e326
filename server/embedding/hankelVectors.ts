import { orthogonaliseRows } from './jacobiRows.ts';
import { laggedProducts } from './laggedProducts.ts';
import { pivotedCholesky } from './pivotedCholesky.ts';
import { rowBlockQr } from './rowBlockQr.ts';
import { countWindows, type Runs } from './runs.ts';

export type HankelMethod = 'lagged products (double-double)' | 'orthogonal (QR)';

/** Left singular vectors and singular values of a stacked Hankel matrix. */
export interface HankelVectors {
  /** channels × delays, the newest sample of the first channel first */
  rows: number;
  /** columns of the Hankel matrix */
  windows: number;
  /** `rows` of them, descending; zero where the method could not tell them from zero */
  singularValues: Float64Array;
  /** found × rows, row-major: row k is the k-th left singular vector, its largest-magnitude entry positive */
  vectors: Float64Array;
  found: number;
  method: HankelMethod;
}

/**
 * Relative depth s_k/s_1 down to which lagged products are used. Squaring costs a value about 1e-31·(s_1/s_k)²: this
 * depth is where six digits are left of it. QR loses only in proportion to s_1/s_k and takes over below. (On
 * noise-free Lorenz data against extended precision, value and vector: lagged products 1e-12 and 6e-12 at 1e-8,
 * 2e-9 and 2e-8 at 2e-12, 7e-4 and 5e-3 at 6e-15; QR 1e-11 and 2e-9, 8e-7 and 4e-6, 2e-4 and 3e-3.)
 */
export const LAGGED_REACH = 5e-13;

/** Where the pivoted factorisation stops, relative to the first pivot: what 32 digits cannot tell from zero. */
const PIVOT_FLOOR = 1e-29;

/**
 * Singular vectors of the Hankel matrix with row (c·delays + j) = line_c[n − j], columns n over all windows of all
 * runs: by lagged products, a pivoted factorisation and an SVD of the factor. No matrix of q × n is formed.
 *
 * @param runs at least one run of `delays` samples
 */
export function vectorsByLaggedProducts(runs: Runs, delays: number): HankelVectors {
  const rows = runs.means.length * delays;
  const factor = pivotedCholesky(laggedProducts(runs, delays), rows, PIVOT_FLOOR);
  return assemble(
    factor.rows,
    factor.rank,
    rows,
    countWindows(runs, delays),
    'lagged products (double-double)',
  );
}

/** The same by row-block QR and an SVD of R: slower, and good to about 1e-16·s_1 whatever the depth. */
export function vectorsByQr(runs: Runs, delays: number): HankelVectors {
  const rows = runs.means.length * delays;
  return assemble(rowBlockQr(runs, delays), rows, rows, countWindows(runs, delays), 'orthogonal (QR)');
}

/**
 * The singular vectors by the method that the wanted depth asks for: lagged products unless s_rank/s_1 lies below
 * LAGGED_REACH.
 *
 * @param chooseRank from singular values (descending) and windows, how many vectors are wanted
 */
export function hankelVectors(
  runs: Runs,
  delays: number,
  chooseRank: (singularValues: Float64Array, windows: number) => number,
): HankelVectors {
  const fast = vectorsByLaggedProducts(runs, delays);
  const wanted = chooseRank(fast.singularValues, fast.windows);
  const deepEnough = fast.singularValues[wanted - 1]! >= LAGGED_REACH * fast.singularValues[0]!;
  return deepEnough ? fast : vectorsByQr(runs, delays);
}

function assemble(
  matrix: Float64Array,
  found: number,
  rows: number,
  windows: number,
  method: HankelMethod,
): HankelVectors {
  const { order, singularValues } = orthogonaliseRows(matrix, found, rows);
  const vectors = new Float64Array(found * rows);
  const padded = new Float64Array(rows);
  padded.set(singularValues);
  order.forEach((row, k) => {
    const source = matrix.subarray(row * rows, (row + 1) * rows);
    // a row of zeros has no direction; it stays zero
    const scale = signOfLargest(source) / (singularValues[k]! || 1);
    for (let i = 0; i < rows; i++) vectors[k * rows + i] = source[i]! * scale;
  });
  return { rows, windows, singularValues: padded, vectors, found, method };
}

function signOfLargest(vector: Float64Array): number {
  let largest = 0;
  for (const entry of vector) if (Math.abs(entry) > Math.abs(largest)) largest = entry;
  return largest < 0 ? -1 : 1;
}
