import type { Slope } from './rungeKutta.ts';

/** The three numbers of the Rössler equations. */
export interface RosslerParameters {
  a: number;
  b: number;
  c: number;
}

/** The usual values in the chaotic range: a turn takes about 5.9, and z lies near 0 but for bursts. */
export const ROSSLER_USUAL: RosslerParameters = { a: 0.2, b: 0.2, c: 5.7 };

/**
 * The Rössler equations: x' = −y − z, y' = x + ay, z' = b + z(x − c).
 *
 * @see Rössler 1976, Physics Letters A 57, p. 397
 */
export function rosslerSlope({ a, b, c }: RosslerParameters): Slope {
  return (state, slope) => {
    const x = state[0]!;
    const y = state[1]!;
    const z = state[2]!;
    slope[0] = -y - z;
    slope[1] = x + a * y;
    slope[2] = b + z * (x - c);
  };
}
