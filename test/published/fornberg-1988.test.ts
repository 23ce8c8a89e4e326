/**
 * B. Fornberg (1988), "Generation of finite difference formulas on arbitrarily spaced grids", Mathematics of Computation
 * 51, 699–706, Table 1: first derivative, central, fourth order: (1, −8, 0, 8, −1)/12. It is also the five-point, degree
 * 3/4 row of A. Savitzky, M. J. E. Golay (1964), Analytical Chemistry 36, 1627–1639. Its error is −h⁴f⁽⁵⁾/30; for sin at
 * t = 1 (recomputed): −1.79886e-6 at h = 0.1, −1.12529e-7 at 0.05, −7.0347e-9 at 0.025.
 */
import { describe, expect, it } from 'vitest';
import { derivativeInto } from '../../server/model/derivative.ts';

describe('the fourth-order central difference', () => {
  it('has the weights (1, −8, 0, 8, −1)/12', () => {
    const out = new Float64Array(1);
    const weights = [0, 1, 2, 3, 4].map((at) => {
      const unit = new Float64Array(5);
      unit[at] = 1;
      derivativeInto(unit, 5, 1, 1, out);
      return 12 * out[0]!;
    });
    for (const [i, weight] of [1, -8, 0, 8, -1].entries()) expect(weights[i]).toBeCloseTo(weight, 14);
  });

  it.each([
    [0.1, -1.79886e-6, 5e-12],
    [0.05, -1.12529e-7, 5e-13],
    [0.025, -7.0347e-9, 5e-14],
  ])('errs on sin at t = 1 with step %f by %f', (step, error, tolerance) => {
    const out = new Float64Array(1);
    derivativeInto(
      Float64Array.from([-2, -1, 0, 1, 2], (i) => Math.sin(1 + i * step)),
      5,
      1,
      step,
      out,
    );
    expect(Math.abs(out[0]! - Math.cos(1) - error)).toBeLessThan(tolerance);
  });

  it('differentiates each column of a row-major matrix by itself', () => {
    const rows = 9;
    const matrix = Float64Array.from({ length: 2 * rows }, (_, i) => (i % 2 === 0 ? (i / 2) ** 4 : 3 - i));
    const out = new Float64Array(2 * (rows - 4));
    derivativeInto(matrix, rows, 2, 1, out);
    for (let i = 0; i < rows - 4; i++) {
      expect(out[2 * i]).toBeCloseTo(4 * (i + 2) ** 3, 9);
      expect(out[2 * i + 1]).toBeCloseTo(-2, 12);
    }
  });
});
