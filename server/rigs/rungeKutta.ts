/** Right-hand side of an autonomous system: writes dx/dt at `state` into `slope`; both of the same length. */
export type Slope = (state: Float64Array, slope: Float64Array) => void;

/** Scratch space of one integrator, made by `createStepper`. */
export interface Stepper {
  slope: Slope;
  slopes: Float64Array[];
  trial: Float64Array;
}

/** Makes what `stepInto` needs for a system of `dimension` unknowns. */
export function createStepper(slope: Slope, dimension: number): Stepper {
  return {
    slope,
    slopes: [0, 1, 2, 3].map(() => new Float64Array(dimension)),
    trial: new Float64Array(dimension),
  };
}

/**
 * One step of the classical fourth-order Runge–Kutta method.
 *
 * @param state overwritten with the state `step` later
 * @param step  in the system's unit of time
 * @see Kutta 1901, Zeitschrift für Mathematik und Physik 46, p. 443
 */
export function stepInto(stepper: Stepper, state: Float64Array, step: number): void {
  const { slope, trial } = stepper;
  const [k1, k2, k3, k4] = stepper.slopes as [Float64Array, Float64Array, Float64Array, Float64Array];
  slope(state, k1);
  for (let i = 0; i < state.length; i++) trial[i] = state[i]! + 0.5 * step * k1[i]!;
  slope(trial, k2);
  for (let i = 0; i < state.length; i++) trial[i] = state[i]! + 0.5 * step * k2[i]!;
  slope(trial, k3);
  for (let i = 0; i < state.length; i++) trial[i] = state[i]! + step * k3[i]!;
  slope(trial, k4);
  for (let i = 0; i < state.length; i++) {
    state[i] = state[i]! + (step / 6) * (k1[i]! + 2 * (k2[i]! + k3[i]!) + k4[i]!);
  }
}

/**
 * A sampled trajectory: row i holds the state at i·every·step, the start included.
 *
 * @param start not changed
 * @param every integration steps between samples, ≥ 1
 * @param rows  samples
 * @returns rows × dimension, row-major
 */
export function trajectory(
  slope: Slope,
  start: ArrayLike<number>,
  step: number,
  every: number,
  rows: number,
): Float64Array {
  const dimension = start.length;
  const state = Float64Array.from(start);
  const stepper = createStepper(slope, dimension);
  const out = new Float64Array(rows * dimension);
  for (let row = 0; row < rows; row++) {
    if (row > 0) for (let i = 0; i < every; i++) stepInto(stepper, state, step);
    out.set(state, row * dimension);
  }
  return out;
}

/**
 * One column of a row-major matrix as an array of its own.
 *
 * @param matrix rows × columns, row-major
 */
export function column(matrix: Float64Array, columns: number, index: number): Float64Array {
  const out = new Float64Array(matrix.length / columns);
  for (let row = 0; row < out.length; row++) out[row] = matrix[row * columns + index]!;
  return out;
}
