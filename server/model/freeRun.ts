import { createProjection, projectInto } from '../embedding/projection.ts';
import { lineInto } from '../embedding/runs.ts';
import type { Coordinates } from './coordinateBlocks.ts';

/** Fewer free runs than this say nothing. */
const FEWEST_STARTS = 10;
const MOST_STARTS = 200;

/** v(t + interval) = Φ·v + Γ₀·f(t) + Γ₁·(f(t + interval) − f(t)) for a forcing that is a straight line between. */
interface Propagator {
  order: number;
  state: Float64Array;
  hold: Float64Array;
  ramp: Float64Array;
}

/**
 * Free runs over a stretch of a recording: from the measured coordinates at a start, dv/dt = A·v + B·f is followed for
 * one window (`delays` steps) with the measured forcing f, and the first coordinate compared with the measured one.
 *
 * @param A    (rank − 1)², row-major
 * @param B    rank − 1
 * @param from first window of the stretch, counted over all runs
 * @returns correlation over up to 200 starts spread over the stretch; null when there are too few
 */
export function freeRunCorrelation(
  runs: readonly (readonly Float64Array[])[],
  of: Coordinates,
  interval: number,
  A: Float64Array,
  B: Float64Array,
  from: number,
): number | null {
  const { delays, rank } = of;
  const starts = spreadStarts(runs, delays, from);
  if (starts.length < FEWEST_STARTS) return null;
  const step = propagatorOf(A, B, interval);
  const projection = createProjection(of.coordinates, of.channels.length, delays, rank);
  const lines = of.channels.map(() => new Float64Array(2 * delays));
  const values = new Float64Array((delays + 1) * rank);
  const simulated: number[] = [];
  const measured: number[] = [];
  for (const { run, first } of starts) {
    for (let c = 0; c < lines.length; c++) {
      lineInto(runs[run]![c]!, first, 2 * delays, of.channels[c]!.mean, 1, lines[c]!);
    }
    projectInto(projection, lines, delays - 1, delays + 1, values);
    simulated.push(follow(step, values, delays, rank));
    measured.push(values[delays * rank]!);
  }
  return correlation(simulated, measured);
}

function spreadStarts(runs: readonly (readonly Float64Array[])[], delays: number, from: number) {
  const starts: { run: number; first: number }[] = [];
  let before = 0;
  runs.forEach((run, index) => {
    const windows = Math.max(0, run[0]!.length - delays + 1);
    for (let first = Math.max(0, from - before); first + delays < windows; first += delays)
      starts.push({ run: index, first });
    before += windows;
  });
  const stride = Math.max(1, Math.ceil(starts.length / MOST_STARTS));
  return starts.filter((_, i) => i % stride === 0);
}

/** First coordinate after `steps` steps from row 0 of `values`, forced by the last coordinate. */
function follow(
  { order, state, hold, ramp }: Propagator,
  values: Float64Array,
  steps: number,
  rank: number,
): number {
  let v = values.slice(0, order);
  for (let n = 0; n < steps; n++) {
    const now = values[n * rank + order]!;
    const change = values[(n + 1) * rank + order]! - now;
    const next = new Float64Array(order);
    for (let i = 0; i < order; i++) {
      let sum = hold[i]! * now + ramp[i]! * change;
      for (let k = 0; k < order; k++) sum += state[i * order + k]! * v[k]!;
      next[i] = sum;
    }
    v = next;
  }
  return v[0]!;
}

/** Exact step for a straight-line forcing, from the exponential of the augmented matrix [A B 0; 0 0 1; 0 0 0]·interval. */
function propagatorOf(A: Float64Array, B: Float64Array, interval: number): Propagator {
  const order = B.length;
  const size = order + 2;
  const augmented = new Float64Array(size * size);
  for (let i = 0; i < order; i++) {
    for (let k = 0; k < order; k++) augmented[i * size + k] = A[i * order + k]! * interval;
    augmented[i * size + order] = B[i]! * interval;
  }
  augmented[order * size + order + 1] = 1;
  const exponential = matrixExponential(augmented, size);
  const state = new Float64Array(order * order);
  for (let i = 0; i < order; i++) state.set(exponential.subarray(i * size, i * size + order), i * order);
  const hold = Float64Array.from({ length: order }, (_, i) => exponential[i * size + order]!);
  const ramp = Float64Array.from({ length: order }, (_, i) => exponential[i * size + order + 1]!);
  return { order, state, hold, ramp };
}

/**
 * exp(M) by scaling, a Taylor series and squaring.
 *
 * @param matrix size × size, row-major
 * @see Moler and Van Loan 2003, SIAM Review 45, 3–49, method 3
 */
export function matrixExponential(matrix: Float64Array, size: number): Float64Array {
  let norm = 0;
  for (const entry of matrix) norm = Math.max(norm, Math.abs(entry) * size);
  const halvings = norm > 0.5 ? Math.ceil(Math.log2(norm)) + 1 : 0;
  const scaled = matrix.map((entry) => entry / 2 ** halvings);
  let sum = new Float64Array(size * size);
  for (let i = 0; i < size; i++) sum[i * size + i] = 1;
  let term = sum;
  for (let k = 1; k <= 18; k++) {
    term = multiply(term, scaled, size).map((entry) => entry / k);
    const power = term;
    sum = sum.map((entry, i) => entry + power[i]!);
  }
  for (let i = 0; i < halvings; i++) sum = multiply(sum, sum, size);
  return sum;
}

function multiply(a: Float64Array, b: Float64Array, size: number): Float64Array<ArrayBuffer> {
  const out = new Float64Array(size * size);
  for (let i = 0; i < size; i++) {
    for (let k = 0; k < size; k++) {
      const factor = a[i * size + k]!;
      for (let j = 0; j < size; j++) out[i * size + j]! += factor * b[k * size + j]!;
    }
  }
  return out;
}

function correlation(x: number[], y: number[]): number | null {
  const xMean = x.reduce((sum, value) => sum + value, 0) / x.length;
  const yMean = y.reduce((sum, value) => sum + value, 0) / y.length;
  let xy = 0;
  let xx = 0;
  let yy = 0;
  x.forEach((value, i) => {
    xy += (value - xMean) * (y[i]! - yMean);
    xx += (value - xMean) ** 2;
    yy += (y[i]! - yMean) ** 2;
  });
  const result = xy / Math.sqrt(xx * yy);
  // an unstable free run overflows: no agreement to speak of
  return Number.isFinite(result) ? result : 0;
}
