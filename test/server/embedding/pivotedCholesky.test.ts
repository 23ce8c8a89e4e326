import { describe, expect, it } from 'vitest';
import { createDoubleDoubles } from '../../../server/embedding/doubleDouble.ts';
import { orthogonaliseRows } from '../../../server/embedding/jacobiRows.ts';
import { pivotedCholesky } from '../../../server/embedding/pivotedCholesky.ts';

describe('the pivoted factorisation', () => {
  it('multiplies back to the matrix it was made of', () => {
    const size = 6;
    const gram = createDoubleDoubles(size * size);
    for (let i = 0; i < size; i++) for (let j = 0; j < size; j++) gram.high[i * size + j] = 1 / (i + j + 1);
    const before = gram.high.slice();
    const { rows, rank } = pivotedCholesky(gram, size, 1e-29);
    expect(rank).toBe(size);
    for (let i = 0; i < size; i++) {
      for (let j = 0; j < size; j++) {
        let sum = 0;
        for (let k = 0; k < rank; k++) sum += rows[k * size + i]! * rows[k * size + j]!;
        expect(Math.abs(sum - before[i * size + j]!)).toBeLessThan(4e-16);
      }
    }
  });

  it('stops at the rank of a matrix that is not of full rank', () => {
    const gram = createDoubleDoubles(9);
    const vector = [1, -2, 3];
    for (let i = 0; i < 3; i++) for (let j = 0; j < 3; j++) gram.high[i * 3 + j] = vector[i]! * vector[j]!;
    expect(pivotedCholesky(gram, 3, 1e-29).rank).toBe(1);
  });
});

describe('one-sided Jacobi', () => {
  it('finds graded singular values to their own last digits', () => {
    // rows of a rotation scaled by 1, 1e-8 and 1e-15: exactly known
    const c = 0.6;
    const s = 0.8;
    const scales = [1, 1e-8, 1e-15];
    const matrix = Float64Array.of(c, s, 0, -s * 1e-8, c * 1e-8, 0, 0, 0, 1e-15);
    // mixes the small rows into larger ones, as a factor does
    for (let i = 0; i < 3; i++) matrix[3 + i]! += 1e-9 * matrix[6 + i]!;
    const { singularValues } = orthogonaliseRows(matrix, 3, 3);
    scales.forEach((scale, k) => {
      expect(Math.abs(singularValues[k]! / scale - 1)).toBeLessThan(1e-14);
    });
  });
});
