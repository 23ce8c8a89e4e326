import type { Slope } from './rungeKutta.ts';

/** The three numbers of the loop model. */
export interface LoopParameters {
  /** ratio of the rates at which flow and temperature differences settle */
  alpha: number;
  /** heating: a modified Rayleigh number */
  beta: number;
  /** strength of the flow-dependent heat transfer at the wall */
  wall: number;
}

/** Values in the range in which the flow keeps reversing, of the size fitted to laboratory loops. */
export const REVERSING_LOOP: LoopParameters = { alpha: 7.99, beta: 27.3, wall: 0.148 };

/**
 * Flow dependence of the heat transfer at the wall: |x|^(1/3) above 1, a polynomial below that meets it with
 * equal value, slope and curvature.
 *
 * @see Ehrhard, Müller 1990, Journal of Fluid Mechanics 217, p. 487
 */
export function wallTransfer(flow: number): number {
  const x = Math.abs(flow);
  if (x > 1) return Math.cbrt(x);
  return x * x * (44 / 9 - x * (55 / 9 - (20 / 9) * x));
}

/**
 * Natural circulation in a closed loop heated below and cooled above: x the flow, y the temperature difference
 * between the rising and the falling leg, z that between top and bottom, all dimensionless:
 * x' = α(y − x), y' = βx − y(1 + K h(|x|)) − xz, z' = xy − z(1 + K h(|x|)).
 *
 * @see Ehrhard, Müller 1990, Journal of Fluid Mechanics 217, p. 487
 */
export function loopSlope({ alpha, beta, wall }: LoopParameters): Slope {
  return (state, slope) => {
    const x = state[0]!;
    const y = state[1]!;
    const z = state[2]!;
    const exchange = 1 + wall * wallTransfer(x);
    slope[0] = alpha * (y - x);
    slope[1] = beta * x - y * exchange - x * z;
    slope[2] = x * y - z * exchange;
  };
}
