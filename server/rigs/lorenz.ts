import { column, type Slope, trajectory } from './rungeKutta.ts';

/** The three numbers of the Lorenz equations. */
export interface LorenzParameters {
  sigma: number;
  rho: number;
  beta: number;
}

/** The values of the first paper, in the chaotic range. */
export const LORENZ_1963: LorenzParameters = { sigma: 10, rho: 28, beta: 8 / 3 };

/**
 * The Lorenz equations: x' = σ(y − x), y' = x(ρ − z) − y, z' = xy − βz.
 *
 * @see Lorenz 1963, Journal of the Atmospheric Sciences 20, p. 130
 */
export function lorenzSlope({ sigma, rho, beta }: LorenzParameters): Slope {
  return (state, slope) => {
    const x = state[0]!;
    const y = state[1]!;
    const z = state[2]!;
    slope[0] = sigma * (y - x);
    slope[1] = x * (rho - z) - y;
    slope[2] = x * y - beta * z;
  };
}

/** How a Lorenz trajectory is to be made; times in the equations' own unit. */
export interface LorenzRun {
  start: readonly [number, number, number];
  /** integration step */
  step: number;
  /** integration steps between samples */
  every: number;
  samples: number;
  parameters?: LorenzParameters;
}

/** All three unknowns at t = 0, every·step, …: samples × 3, row-major. */
export function lorenzStates(run: LorenzRun): Float64Array {
  return trajectory(lorenzSlope(run.parameters ?? LORENZ_1963), run.start, run.step, run.every, run.samples);
}

/** The first unknown at t = 0, every·step, … */
export function lorenzSeries(run: LorenzRun): Float64Array {
  return column(lorenzStates(run), 3, 0);
}
