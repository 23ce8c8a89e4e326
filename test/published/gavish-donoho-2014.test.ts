/**
 * M. Gavish, D. L. Donoho (2014), "The optimal hard threshold for singular values is 4/√3", IEEE Transactions on
 * Information Theory 60(8), 5040–5053. From the abstract: 4/√3 for known noise, 2.858 for unknown noise (square).
 * λ*, the median μ of the Marchenko–Pastur law and ω below are recomputed by adaptive quadrature, six digits.
 */
import { describe, expect, it } from 'vitest';
import {
  chooseRank,
  marchenkoPasturMedian,
  medianThreshold,
  optimalThreshold,
} from '../../server/embedding/rankChoice.ts';

/** β, λ*(β), μ_β, ω(β). */
const TABLE: [number, number, number, number][] = [
  [0.001, 1.416328, 0.999667, 1.416564],
  [0.01, 1.434748, 0.996666, 1.437146],
  [0.05, 1.506607, 0.983308, 1.519341],
  [0.1, 1.581648, 0.966565, 1.608772],
  [0.15, 1.646625, 0.949768, 1.689607],
  [0.2, 1.704815, 0.932915, 1.765046],
  [0.25, 1.758029, 0.916004, 1.836866],
  [0.3, 1.807392, 0.899031, 1.906185],
  [0.4, 1.897367, 0.86489, 2.040191],
  [0.5, 1.978599, 0.830466, 2.171185],
  [0.6, 2.053306, 0.795727, 2.301821],
  [0.7, 2.1229, 0.760638, 2.434112],
  [0.8, 2.188347, 0.725154, 2.56981],
  [0.9, 2.250341, 0.689222, 2.71062],
  [1, 2.309401, 0.652776, 2.858362],
];

describe('the optimal hard threshold', () => {
  it.each(TABLE)('has its tabulated value at aspect %f', (aspect, lambda, mu, omega) => {
    expect(Math.abs(optimalThreshold(aspect) - lambda)).toBeLessThan(5.1e-7);
    expect(Math.abs(marchenkoPasturMedian(aspect) - mu)).toBeLessThan(5.1e-7);
    expect(Math.abs(medianThreshold(aspect) - omega)).toBeLessThan(1e-6);
  });

  it('is 4/√3 for a square matrix and 2.858 of the median', () => {
    expect(Math.abs(optimalThreshold(1) - 4 / Math.sqrt(3))).toBeLessThan(1e-12);
    expect(Math.abs(medianThreshold(1) - 2.858)).toBeLessThan(5e-4);
  });

  it('counts the singular values above it and says that Hankel noise is not what it assumes', () => {
    const choice = chooseRank(Float64Array.of(100, 50, 2.9, 1, 1, 0.9, 0.8), 7);
    expect(choice.rank).toBe(3);
    expect(choice.words).toContain('independent noise');
  });

  it('counts no more than rounding leaves when the median is lost in it', () => {
    expect(chooseRank(Float64Array.of(1, 1e-3, 1e-7, 1e-9, 0, 0, 0, 0, 0), 10_000).rank).toBe(3);
  });
});
