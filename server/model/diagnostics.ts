import { EigenvalueDecomposition, Matrix } from 'ml-matrix';
import type { Diagnostics, ForcingCounts, ValidityLimits } from '../../shared-types/model.ts';
import { BLOCK, type Coordinates, walkCoordinates } from './coordinateBlocks.ts';
import { freeRunCorrelation } from './freeRun.ts';
import { addSums, createNormalSums, type NormalSums, rSquared, solveLeastSquares } from './leastSquares.ts';
import { regressionSums } from './regression.ts';
import { type Validity, validityInto, validityLimits } from './validity.ts';

/** Share of the windows that the held-out check fits on; the rest is its tail. */
const HEAD = 0.8;
/** Windows looked at for the quantiles of SPE and T²; a longer record is read at every second, third … window. */
const MOST_WINDOWS = 100_000;

/** Bins of the forcing's histogram: a quarter of a standard deviation wide, from −6 to 6. */
const BIN = 0.25;
const BINS = 48;

/** A and B and how well they fit. */
export interface Regression {
  A: Float64Array;
  B: Float64Array;
  r2: Float64Array;
  heldOut: Diagnostics['heldOut'];
}

/**
 * Fits dv/dt = A·v + B·v_r on all windows, and judges it by a second fit on the first 80 % of them: R² of each row on
 * the tail (which begins one window later, so that no sample is in both) and free runs there. The singular vectors
 * themselves are those of the whole recording.
 *
 * @param windows all windows of all runs
 */
export function regress(
  runs: readonly (readonly Float64Array[])[],
  of: Coordinates,
  interval: number,
  windows: number,
): Regression {
  const { rank, delays } = of;
  const split = Math.floor(HEAD * windows);
  const tail = split + delays;
  const everything = { from: 0, to: Number.POSITIVE_INFINITY };
  const parts = [
    { from: 0, to: split },
    { from: split, to: tail },
    { from: tail, to: everything.to },
  ];
  const sums = regressionSums(runs, of, interval, parts);
  const [head, , held] = sums as [NormalSums, NormalSums, NormalSums];
  const all = createNormalSums(rank, rank);
  for (const part of sums) addSums(all, part);
  const coefficients = solveLeastSquares(all);
  const { A, B } = partsOf(coefficients, rank);
  const r2 = rSquared(all, coefficients).slice(0, rank - 1);
  let heldOut: Diagnostics['heldOut'] = null;
  if (head.rows >= 10 * rank && held.rows >= 10 * rank) {
    const ofHead = solveLeastSquares(head);
    const own = partsOf(ofHead, rank);
    const correlation = freeRunCorrelation(runs, of, interval, own.A, own.B, tail);
    if (correlation !== null) {
      heldOut = { oneStepR2: rSquared(held, ofHead).slice(0, rank - 1), freeRunCorrelation: correlation };
    }
  }
  return { A, B, r2, heldOut };
}

/** A and B out of the coefficients of all coordinates on all coordinates (rank², row-major). */
function partsOf(coefficients: Float64Array, rank: number): { A: Float64Array; B: Float64Array } {
  const order = rank - 1;
  const A = new Float64Array(order * order);
  const B = new Float64Array(order);
  for (let i = 0; i < order; i++) {
    A.set(coefficients.subarray(i * rank, i * rank + order), i * order);
    B[i] = coefficients[i * rank + order]!;
  }
  return { A, B };
}

/** What one walk through the training windows says of the forcing and of the limits. */
export interface Spread {
  /** excess kurtosis of the last coordinate, and the share of windows where it is beyond 2 (its rms is 1) */
  forcing: { kurtosis: number; share: number; counts: ForcingCounts };
  validity: ValidityLimits;
}

/**
 * Spread of the forcing and limits of validity over the training windows.
 *
 * @param left variances outside the subspace, in squared units of the scaled channel
 */
export function measureSpread(
  runs: readonly (readonly Float64Array[])[],
  of: Coordinates,
  windows: number,
  validity: Validity,
  left: Float64Array,
): Spread {
  const { rank, delays } = of;
  const stride = Math.ceil(windows / MOST_WINDOWS);
  const spe = new Float64Array(Math.ceil(windows / stride));
  const t2 = new Float64Array(spe.length);
  const blockSpe = new Float64Array(BLOCK);
  const blockT2 = new Float64Array(BLOCK);
  const powers = [0, 0, 0, 0];
  const counts = new Array<number>(BINS).fill(0);
  let beyond = 0;
  walkCoordinates(runs, of, (block) => {
    validityInto(validity, block.lines, delays - 1, block.count, block.values, blockSpe, blockT2);
    for (let i = block.fresh; i < block.count; i++) {
      const v = block.values[i * rank + rank - 1]!;
      const square = v * v;
      powers[0]! += v;
      powers[1]! += square;
      powers[2]! += square * v;
      powers[3]! += square * square;
      if (square > 4) beyond++;
      counts[Math.max(0, Math.min(BINS - 1, Math.floor(v / BIN + BINS / 2)))]!++;
      const ordinal = block.ordinal + i;
      if (ordinal % stride !== 0) continue;
      spe[ordinal / stride] = blockSpe[i]!;
      t2[ordinal / stride] = blockT2[i]!;
    }
  });
  const [m1, m2, m3, m4] = powers.map((power) => power / windows) as [number, number, number, number];
  const variance = m2 - m1 * m1;
  const fourth = m4 - 4 * m1 * m3 + 6 * m1 * m1 * m2 - 3 * m1 ** 4;
  return {
    forcing: {
      kurtosis: fourth / (variance * variance) - 3,
      share: beyond / windows,
      counts: { from: (-BINS / 2) * BIN, width: BIN, counts },
    },
    validity: validityLimits(left, validity, windows, spe, t2),
  };
}

/**
 * Departure from antisymmetry, ‖A + Aᵀ‖_F/‖A‖_F: 0 for an antisymmetric matrix, 2 for a symmetric one.
 *
 * @param A order², row-major
 */
export function antisymmetryDefect(A: Float64Array, order: number): number {
  let defect = 0;
  let size = 0;
  for (let i = 0; i < order; i++) {
    for (let j = 0; j < order; j++) {
      defect += (A[i * order + j]! + A[j * order + i]!) ** 2;
      size += A[i * order + j]! ** 2;
    }
  }
  return size === 0 ? 0 : Math.sqrt(defect / size);
}

/**
 * Eigenvalues of A, 1/s, in order of rising imaginary magnitude.
 *
 * @param A order², row-major
 */
export function eigenvaluesOf(A: Float64Array, order: number): { re: number; im: number }[] {
  const { realEigenvalues, imaginaryEigenvalues } = new EigenvalueDecomposition(
    Matrix.from1DArray(order, order, A),
    {
      assumeSymmetric: false,
    },
  );
  return realEigenvalues
    .map((re, i) => ({ re, im: imaginaryEigenvalues[i]! }))
    .sort((a, b) => Math.abs(a.im) - Math.abs(b.im) || a.im - b.im || a.re - b.re);
}
