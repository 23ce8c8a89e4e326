import { Matrix, pseudoInverse } from 'ml-matrix';
import { describe, expect, it } from 'vitest';
import { matrixExponential } from '../../../server/model/freeRun.ts';
import {
  addRows,
  createNormalSums,
  rSquared,
  solveLeastSquares,
} from '../../../server/model/leastSquares.ts';
import { createRandom } from '../../../server/rigs/random.ts';

const { gaussian } = createRandom(6);

describe('least squares', () => {
  it('agrees with the pseudo-inverse of the whole matrix', () => {
    const rows = 200;
    const x = Float64Array.from({ length: 3 * rows }, gaussian);
    const y = Float64Array.from({ length: 2 * rows }, gaussian);
    const sums = createNormalSums(3, 2);
    addRows(sums, x, y, 0, 90);
    addRows(sums, x, y, 90, rows);
    const coefficients = solveLeastSquares(sums);
    const wide = Matrix.from1DArray(rows, 3, x);
    const oracle = pseudoInverse(wide)
      .mmul(Matrix.from1DArray(rows, 2, y))
      .transpose();
    for (const [i, value] of oracle.to1DArray().entries()) expect(coefficients[i]).toBeCloseTo(value, 12);
    const residual = wide.mmul(oracle.transpose()).sub(Matrix.from1DArray(rows, 2, y));
    for (let t = 0; t < 2; t++) {
      const left = residual.getColumn(t).reduce((sum, value) => sum + value * value, 0);
      const all = y.reduce((sum, value, i) => (i % 2 === t ? sum + value * value : sum), 0);
      expect(rSquared(sums, coefficients)[t]).toBeCloseTo(1 - left / all, 12);
    }
  });

  it('takes the smallest solution where a predictor repeats another', () => {
    const x = Float64Array.from({ length: 40 }, (_, i) => Math.sin(i >> 1));
    const y = Float64Array.from({ length: 20 }, (_, i) => 6 * Math.sin(i));
    const sums = createNormalSums(2, 1);
    addRows(sums, x, y, 0, 20);
    const [a, b] = solveLeastSquares(sums);
    expect(a).toBeCloseTo(3, 6);
    expect(b).toBeCloseTo(3, 6);
  });
});

describe('the matrix exponential', () => {
  it('turns a rotation generator into the rotation, far round', () => {
    const turned = matrixExponential(Float64Array.of(0, -20, 20, 0), 2);
    expect(turned[0]).toBeCloseTo(Math.cos(20), 11);
    expect(turned[2]).toBeCloseTo(Math.sin(20), 11);
  });
});
