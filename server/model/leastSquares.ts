import { Matrix, pseudoInverse } from 'ml-matrix';

/** Sums of a regression of several targets y on the same predictors x, taken row by row. */
export interface NormalSums {
  predictors: number;
  targets: number;
  rows: number;
  /** Σ x xᵀ, predictors², row-major, lower triangle */
  gram: Float64Array;
  /** Σ y xᵀ, targets × predictors, row-major */
  cross: Float64Array;
  /** Σ y², targets */
  squares: Float64Array;
}

/** Empty sums. */
export function createNormalSums(predictors: number, targets: number): NormalSums {
  return {
    predictors,
    targets,
    rows: 0,
    gram: new Float64Array(predictors * predictors),
    cross: new Float64Array(targets * predictors),
    squares: new Float64Array(targets),
  };
}

/**
 * Adds rows [from, to) of x and y. Meant for delay coordinates: of unit rms and nearly uncorrelated, so that their Gram
 * matrix is close to a multiple of the identity and nothing is lost by squaring.
 *
 * @param x rows × predictors, row-major; row i of x belongs to row i of y
 * @param y rows × targets, row-major
 */
export function addRows(sums: NormalSums, x: Float64Array, y: Float64Array, from: number, to: number): void {
  const { predictors, targets, gram, cross, squares } = sums;
  for (let row = from; row < to; row++) {
    const xAt = row * predictors;
    const yAt = row * targets;
    for (let a = 0; a < predictors; a++) {
      const xa = x[xAt + a]!;
      const at = a * predictors;
      for (let b = 0; b <= a; b++) gram[at + b]! += xa * x[xAt + b]!;
    }
    for (let t = 0; t < targets; t++) {
      const yt = y[yAt + t]!;
      const at = t * predictors;
      for (let a = 0; a < predictors; a++) cross[at + a]! += yt * x[xAt + a]!;
      squares[t]! += yt * yt;
    }
  }
  sums.rows += Math.max(0, to - from);
}

/** into += from. */
export function addSums(into: NormalSums, from: NormalSums): void {
  into.rows += from.rows;
  for (let i = 0; i < into.gram.length; i++) into.gram[i]! += from.gram[i]!;
  for (let i = 0; i < into.cross.length; i++) into.cross[i]! += from.cross[i]!;
  for (let i = 0; i < into.squares.length; i++) into.squares[i]! += from.squares[i]!;
}

/**
 * Coefficients C that minimise Σ |y − C·x|²: targets × predictors, row-major. By Cholesky; where a predictor repeats
 * others to rounding, the smallest solution is taken instead.
 */
export function solveLeastSquares(sums: NormalSums): Float64Array {
  const { predictors: n, targets, cross } = sums;
  const factor = choleskyOf(sums.gram, n);
  if (factor === null) return smallestSolution(sums);
  const out = Float64Array.from(cross);
  for (let t = 0; t < targets; t++) {
    const at = t * n;
    for (let i = 0; i < n; i++) {
      let sum = out[at + i]!;
      for (let k = 0; k < i; k++) sum -= factor[i * n + k]! * out[at + k]!;
      out[at + i] = sum / factor[i * n + i]!;
    }
    for (let i = n - 1; i >= 0; i--) {
      let sum = out[at + i]!;
      for (let k = i + 1; k < n; k++) sum -= factor[k * n + i]! * out[at + k]!;
      out[at + i] = sum / factor[i * n + i]!;
    }
  }
  return out;
}

function choleskyOf(gram: Float64Array, n: number): Float64Array | null {
  const factor = new Float64Array(n * n);
  for (let i = 0; i < n; i++) {
    for (let j = 0; j <= i; j++) {
      let sum = gram[i * n + j]!;
      for (let k = 0; k < j; k++) sum -= factor[i * n + k]! * factor[j * n + k]!;
      if (i > j) factor[i * n + j] = sum / factor[j * n + j]!;
      else if (!(sum > 1e-13 * gram[i * n + i]!)) return null;
      else factor[i * n + i] = Math.sqrt(sum);
    }
  }
  return factor;
}

function smallestSolution({ gram, cross, predictors: n, targets }: NormalSums): Float64Array {
  const full = new Matrix(n, n);
  for (let i = 0; i < n; i++)
    for (let j = 0; j < n; j++) full.set(i, j, gram[Math.max(i, j) * n + Math.min(i, j)]!);
  const right = Matrix.from1DArray(targets, n, cross);
  return Float64Array.from(right.mmul(pseudoInverse(full)).to1DArray());
}

/**
 * R² of each target about zero, 1 − Σ(y − C·x)²/Σy², of any rows for any coefficients.
 *
 * @param coefficients targets × predictors, row-major
 * @returns NaN for a target that is zero throughout
 */
export function rSquared(sums: NormalSums, coefficients: Float64Array): Float64Array {
  const { predictors: n, targets, gram, cross, squares } = sums;
  const out = new Float64Array(targets);
  for (let t = 0; t < targets; t++) {
    let explained = 0;
    for (let a = 0; a < n; a++) {
      const ca = coefficients[t * n + a]!;
      let product = 0;
      for (let b = 0; b < n; b++)
        product += gram[Math.max(a, b) * n + Math.min(a, b)]! * coefficients[t * n + b]!;
      explained += ca * (2 * cross[t * n + a]! - product);
    }
    out[t] = explained / squares[t]!;
  }
  return out;
}
