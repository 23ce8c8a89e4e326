import { createRandom } from './random.ts';

/** Independent standard normal values. */
export function whiteNoise(seed: number | string, samples: number): Float64Array {
  const { gaussian } = createRandom(seed);
  return Float64Array.from({ length: samples }, gaussian);
}

/**
 * Red noise of unit variance, begun in its stationary state: x[i] = φ x[i − 1] + √(1 − φ²) ε[i].
 *
 * @param kept φ, 0 ≤ φ < 1: the share that is left after one step
 */
export function redNoise(seed: number | string, samples: number, kept: number): Float64Array {
  const { gaussian } = createRandom(seed);
  const kick = Math.sqrt(1 - kept * kept);
  const out = new Float64Array(samples);
  let value = gaussian();
  for (let i = 0; i < samples; i++) {
    out[i] = value;
    value = kept * value + kick * gaussian();
  }
  return out;
}
