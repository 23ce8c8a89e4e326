import type { Slope } from './rungeKutta.ts';

/** The forced oscillator in two wells. */
export interface DuffingParameters {
  damping: number;
  /** of the forcing */
  amplitude: number;
  /** of the forcing, radians per unit of time */
  frequency: number;
}

/** Values at which the oscillator wanders between its wells without a period. */
export const DUFFING_WANDERING: DuffingParameters = { damping: 0.25, amplitude: 0.4, frequency: 1 };

/**
 * Duffing's oscillator between two wells at x = ±1: x' = y, y' = x − x³ − δy + γ cos θ, θ' = ω; state (x, y, θ).
 *
 * @see Holmes 1979, Philosophical Transactions of the Royal Society A 292, p. 419
 */
export function duffingSlope({ damping, amplitude, frequency }: DuffingParameters): Slope {
  return (state, slope) => {
    const x = state[0]!;
    const y = state[1]!;
    slope[0] = y;
    slope[1] = x - x * x * x - damping * y + amplitude * Math.cos(state[2]!);
    slope[2] = frequency;
  };
}
