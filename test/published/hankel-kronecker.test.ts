/**
 * Exact anchors of Hankel matrix, singular vectors and regression.
 *
 * Kronecker's theorem: the Hankel matrix of p real sinusoids has rank 2p. Two tones, cos(t) + 0.3·sin(√7·t + 0.4),
 * interval 0.01, 20,000 samples: s_5/s_1 < 1e-12; the eigenvalues of the regression are ±i and ±i·√7, the larger low by
 * the stencil's own error ω⁵h⁴/30 = 4.321e-8.
 * One cosine, ω = 2, interval 0.01, 100 delays: 2s²/m = (q ± |sin(qωh)/sin(ωh)|)/2 = 72.734 and 27.266, within 0.3 % for
 * a finite record.
 * Condition of the Hilbert matrix, a Hankel matrix: 5.2406e2, 4.7661e5, 1.52576e10 for n = 3, 5, 8 (N. J. Higham 2002,
 * Accuracy and Stability of Numerical Algorithms, 2nd ed., chapter 28; from memory, recomputed).
 */
import { EigenvalueDecomposition, Matrix } from 'ml-matrix';
import { describe, expect, it } from 'vitest';
import { vectorsByLaggedProducts, vectorsByQr } from '../../server/embedding/hankelVectors.ts';
import { solveLeastSquares } from '../../server/model/leastSquares.ts';
import { regressionSums } from '../../server/model/regression.ts';

const runsOf = (values: Float64Array) => ({
  samples: [[values]],
  means: new Float64Array(1),
  weights: Float64Array.of(1),
});
const TONES = Float64Array.from(
  { length: 20_000 },
  (_, i) => Math.cos(0.01 * i) + 0.3 * Math.sin(Math.sqrt(7) * 0.01 * i + 0.4),
);
const METHODS = { vectorsByLaggedProducts, vectorsByQr };

describe('exact anchors', () => {
  describe.each(Object.entries(METHODS))('%s', (_, vectorsOf) => {
    it.each([20, 100])('finds rank 4 in two tones with %i delays', (delays) => {
      const { singularValues } = vectorsOf(runsOf(TONES), delays);
      expect(singularValues[4]! / singularValues[0]!).toBeLessThan(1e-12);
      expect(singularValues[3]! / singularValues[0]!).toBeGreaterThan(1e-6);
    });

    it('gives the singular values of one cosine', () => {
      const cosine = Float64Array.from({ length: 20_000 }, (__, i) => Math.cos(0.02 * i));
      const { singularValues, windows } = vectorsOf(runsOf(cosine), 100);
      expect(Math.abs((2 * singularValues[0]! ** 2) / windows / 72.734 - 1)).toBeLessThan(0.003);
      expect(Math.abs((2 * singularValues[1]! ** 2) / windows / 27.266 - 1)).toBeLessThan(0.003);
    });

    it.each([
      [3, 5.2406e2, 5e-2],
      [5, 4.7661e5, 50],
      [8, 1.52576e10, 5e5],
    ])('gives the condition of the Hilbert matrix of order %i', (n, condition, tolerance) => {
      const entries = Float64Array.from({ length: 2 * n - 1 }, (__, i) => 1 / (i + 1));
      const { singularValues } = vectorsOf(runsOf(entries), n);
      expect(Math.abs(singularValues[0]! / singularValues[n - 1]! - condition)).toBeLessThan(tolerance);
    });
  });

  it.each([20, 100])(
    'finds the frequencies of two tones with %i delays, short by the error of the stencil',
    (delays) => {
      const { vectors, singularValues, windows } = vectorsByLaggedProducts(runsOf(TONES), delays);
      const coordinates = new Float64Array(4 * delays);
      for (let k = 0; k < 4; k++) {
        for (let row = 0; row < delays; row++) {
          coordinates[row * 4 + k] = (Math.sqrt(windows) / singularValues[k]!) * vectors[k * delays + row]!;
        }
      }
      const of = { channels: [{ mean: 0 }], delays, rank: 4, coordinates };
      const [sums] = regressionSums([[TONES]], of, 0.01);
      const matrix = Matrix.from1DArray(4, 4, solveLeastSquares(sums!));
      const { realEigenvalues, imaginaryEigenvalues } = new EigenvalueDecomposition(matrix, {
        assumeSymmetric: false,
      });
      for (const real of realEigenvalues) expect(Math.abs(real)).toBeLessThan(1e-13);
      const frequencies = imaginaryEigenvalues.map(Math.abs).sort((a, b) => a - b);
      const low = (omega: number) => omega - (omega ** 5 * 0.01 ** 4) / 30;
      expect(Math.abs(frequencies[0]! - low(1))).toBeLessThan(1e-11);
      expect(Math.abs(frequencies[3]! - low(Math.sqrt(7)))).toBeLessThan(1e-11);
      expect(Math.sqrt(7) - frequencies[3]!).toBeGreaterThan(4.31e-8);
      expect(Math.sqrt(7) - frequencies[3]!).toBeLessThan(4.33e-8);
    },
  );
});
