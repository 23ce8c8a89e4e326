import type { Slope } from './rungeKutta.ts';

/** What is varied of the neuron model; the others keep their usual values. */
export interface HindmarshRoseParameters {
  /** applied current */
  current: number;
  /** how slowly the adaptation follows */
  slowness: number;
}

/** Values at which bursts of spikes come without a period. */
export const HINDMARSH_ROSE_BURSTING: HindmarshRoseParameters = { current: 3.25, slowness: 0.006 };

/**
 * The neuron of Hindmarsh and Rose: x the membrane potential, y the recovery, z the slow adaptation, all
 * dimensionless: x' = y − x³ + 3x² − z + I, y' = 1 − 5x² − y, z' = r(4(x + 1.6) − z).
 *
 * @see Hindmarsh, Rose 1984, Proceedings of the Royal Society B 221, p. 87
 */
export function hindmarshRoseSlope({ current, slowness }: HindmarshRoseParameters): Slope {
  return (state, slope) => {
    const x = state[0]!;
    const y = state[1]!;
    const z = state[2]!;
    slope[0] = y - x * x * x + 3 * x * x - z + current;
    slope[1] = 1 - 5 * x * x - y;
    slope[2] = slowness * (4 * (x + 1.6) - z);
  };
}
