import {
  createDoubleDoubles,
  type DoubleDoubles,
  divideAt,
  squareRootAt,
  subtractProductAt,
} from './doubleDouble.ts';

/** F with G = FᵀF: `rank` rows × `size` columns, row-major; rows in order of falling pivots. */
export interface CholeskyFactor {
  rank: number;
  size: number;
  rows: Float64Array;
}

/**
 * Cholesky factorisation with complete (diagonal) pivoting, in double-double, rounded to doubles at the end; columns stay in the order of G.
 *
 * @param gram  size × size, row-major, symmetric and positive semi-definite; overwritten
 * @param floor stops once the largest remaining diagonal entry is below floor × the first
 * @see Higham 2002, Accuracy and Stability of Numerical Algorithms, 2nd ed., section 10.3
 */
export function pivotedCholesky(gram: DoubleDoubles, size: number, floor: number): CholeskyFactor {
  const factor = createDoubleDoubles(size * size);
  const left = Array.from({ length: size }, (_, i) => i);
  let stop = 0;
  let rank = 0;
  for (; rank < size; rank++) {
    const pivot = largestDiagonal(gram, size, left);
    const largest = gram.high[pivot * size + pivot]!;
    if (rank === 0) stop = floor * largest;
    if (!(largest > stop)) break;
    left.splice(left.indexOf(pivot), 1);
    takeRow(gram, factor, size, rank, pivot, left);
  }
  return { rank, size, rows: factor.high.slice(0, rank * size) };
}

function largestDiagonal(gram: DoubleDoubles, size: number, left: number[]): number {
  let pivot = left[0]!;
  for (const i of left) if (gram.high[i * size + i]! > gram.high[pivot * size + pivot]!) pivot = i;
  return pivot;
}

/** Row `rank` of the factor from row `pivot` of what is left of G, and its product taken off the rest. */
function takeRow(
  gram: DoubleDoubles,
  factor: DoubleDoubles,
  size: number,
  rank: number,
  pivot: number,
  left: number[],
): void {
  const row = rank * size;
  factor.high[row + pivot] = gram.high[pivot * size + pivot]!;
  factor.low[row + pivot] = gram.low[pivot * size + pivot]!;
  squareRootAt(factor, row + pivot);
  for (const j of left) {
    // only the upper triangle is kept up to date
    const at = Math.min(pivot, j) * size + Math.max(pivot, j);
    factor.high[row + j] = gram.high[at]!;
    factor.low[row + j] = gram.low[at]!;
    divideAt(factor, row + j, factor, row + pivot);
  }
  for (let a = 0; a < left.length; a++) {
    const i = left[a]!;
    for (let b = a; b < left.length; b++)
      subtractProductAt(gram, i * size + left[b]!, factor, row + i, row + left[b]!);
  }
}
