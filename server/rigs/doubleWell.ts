import { createRandom } from './random.ts';

/** A particle in two wells at x = ±1, kicked from one to the other by noise alone. */
export interface DoubleWell {
  /** strength D of the noise; the barrier is 1/4 high */
  noise: number;
  /** integration step */
  step: number;
  start?: number;
}

/**
 * Starts dx = (x − x³) dt + √(2D) dW; each call of the function returned gives x one step later, by the method of
 * Euler and Maruyama.
 *
 * @see Kramers 1940, Physica 7, p. 284
 * @see Maruyama 1955, Rendiconti del Circolo Matematico di Palermo 4, p. 48
 */
export function createDoubleWell(
  seed: number | string,
  { noise, step, start = -1 }: DoubleWell,
): () => number {
  const { gaussian } = createRandom(seed);
  const kick = Math.sqrt(2 * noise * step);
  let x = start;
  return () => {
    x += step * (x - x * x * x) + kick * gaussian();
    return x;
  };
}

/** x at every·step, 2·every·step, … */
export function doubleWellSeries(
  seed: number | string,
  well: DoubleWell,
  every: number,
  samples: number,
): Float64Array {
  const next = createDoubleWell(seed, well);
  return Float64Array.from({ length: samples }, () => {
    for (let i = 1; i < every; i++) next();
    return next();
  });
}
