/**
 * S. L. Brunton, B. W. Brunton, J. L. Proctor, E. Kaiser, J. N. Kutz (2017), "Chaos as an intermittently forced linear
 * system", Nature Communications 8:19: Lorenz x(t) with σ = 10, ρ = 28, β = 8/3 from (−8, 8, 27), interval 0.001,
 * 100 delays, no centring, derivative by the five-point stencil.
 *
 * The paper prints no digits of A and B (a colour map). The values below are recomputed: two integrators (Runge–Kutta
 * with step 0.001 and DOP853 at 1e-12) agree on them to the tolerances given; signs depend on those of the singular
 * vectors, so magnitudes are compared.
 *
 *   T = 10, r = 7   |super| 5.21512  9.91938  14.27421  18.57032  24.30032   last of B 28.10264
 *                   |sub|   5.08071  9.23580  13.10020  17.25851  23.39444   tolerance 1e-5
 *                   singular values 7749.260, 1190.077, 155.7895, 19.18115, 2.29244
 *   T = 20, r = 7   |super| 4.8825   10.0417  13.5804   19.2578   23.6588    last of B 29.403
 *                   |sub|   4.8451   9.7059   12.9338   18.5046   23.0677    tolerance 2e-4
 *
 * Long records (T = 200), recomputed over 12 random starts, 5 % an entry beyond the spread of the attractor:
 *   |super| 5.23 9.85 13.65 18.66 23.21 28.45 33.36 38.59 43.71 48.97 54.17 59.54 64.67, last of B 70.2 (r = 15),
 *   49.0 (r = 11).
 *
 * Common practice, no source: the entries beside the diagonal are quoted as close to multiples of five, in pairs of
 * opposite sign.
 */
import { describe, expect, it } from 'vitest';
import { fitModel } from '../../server/model/fit.ts';
import { lorenzSeries } from '../../server/rigs/lorenz.ts';
import type { Model } from '../../shared-types/model.ts';

const record = (samples: number): Float64Array =>
  lorenzSeries({ start: [-8, 8, 27], step: 0.001, every: 1, samples });

const published = (values: Float64Array, rank: number): Model =>
  fitModel([[values]], 0.001, {
    name: 'lorenz',
    channels: [{ channel: 'x', unit: '' }],
    delays: 100,
    rank,
    center: 'none',
    gapIntervals: 3,
  });

const beside = ({ A, rank }: Model, row: number, column: number): number[] =>
  Array.from({ length: rank - 2 }, (_, i) => A[(i + row) * (rank - 1) + i + column]!);

const superDiagonal = (model: Model): number[] => beside(model, 0, 1);
const subDiagonal = (model: Model): number[] => beside(model, 1, 0);

function expectClose(values: ArrayLike<number>, expected: number[], relative: number): void {
  expected.forEach((value, i) => {
    expect(
      Math.abs(Math.abs(values[i]!) / value - 1),
      `entry ${i + 1}: ${values[i]} for ${value}`,
    ).toBeLessThan(relative);
  });
}

const LONG = record(200_000);
/** |A_{i,i+1}| of long records, mean over 12 starts. */
const LONG_RECORD = [5.23, 9.85, 13.65, 18.66, 23.21, 28.45, 33.36, 38.59, 43.71, 48.97, 54.17, 59.54, 64.67];

describe('the published Lorenz fit', () => {
  it('has the recomputed entries and singular values at T = 10', () => {
    const model = published(record(10_000), 7);
    expectClose(superDiagonal(model), [5.21512, 9.91938, 14.27421, 18.57032, 24.30032], 1e-5);
    expectClose(subDiagonal(model), [5.08071, 9.2358, 13.1002, 17.25851, 23.39444], 1e-5);
    expectClose(model.B.slice(5), [28.10264], 1e-5);
    expectClose(model.singularValues, [7749.26, 1190.077, 155.7895, 19.18115, 2.29244], 1e-5);
  });

  it('has the recomputed entries at T = 20', () => {
    const model = published(record(20_000), 7);
    expectClose(superDiagonal(model), [4.8825, 10.0417, 13.5804, 19.2578, 23.6588], 2e-4);
    expectClose(subDiagonal(model), [4.8451, 9.7059, 12.9338, 18.5046, 23.0677], 2e-4);
    expectClose(model.B.slice(5), [29.403], 2e-4);
  });

  const long = [
    { rank: 11, lastOfB: 49, method: 'lagged products (double-double)', kurtosis: 10 },
    { rank: 15, lastOfB: 70.2, method: 'orthogonal (QR)', kurtosis: 10 },
  ];
  it.each(long)(
    'has the structure of long records at rank $rank, by $method',
    ({ rank, lastOfB, method, kurtosis }) => {
      const model = published(LONG, rank);
      const order = rank - 1;
      const above = superDiagonal(model);
      const below = subDiagonal(model);
      expect(model.diagnostics.method).toBe(method);
      expectClose(above, LONG_RECORD.slice(0, rank - 2), 0.05);
      expectClose(below, LONG_RECORD.slice(0, rank - 2), 0.05);
      expectClose([model.B[order - 1]!], [lastOfB], 0.05);
      for (let i = 0; i < above.length; i++) {
        expect(above[i]! * below[i]!).toBeLessThan(0);
        if (i > 0) expect(Math.abs(above[i]!)).toBeGreaterThan(Math.abs(above[i - 1]!));
      }
      for (let i = 0; i < order; i++) {
        expect(Math.abs(model.A[i * order + i]!)).toBeLessThan(0.3);
        if (i < order - 1) expect(Math.abs(model.B[i]!)).toBeLessThan(0.03 * Math.abs(model.B[order - 1]!));
        for (let j = 0; j < order; j++) {
          if (Math.abs(i - j) > 1) expect(Math.abs(model.A[i * order + j]!)).toBeLessThan(1.2);
        }
      }
      expect(Math.min(...model.diagnostics.r2)).toBeGreaterThan(0.999);
      expect(model.diagnostics.forcing.kurtosis).toBeGreaterThan(kurtosis);
    },
  );

  it('lies close to multiples of five in pairs of opposite sign, as common practice has it', () => {
    const model = published(LONG, 11);
    superDiagonal(model).forEach((entry, i) => {
      // within the spread of long records: the third entry is 13.65, the others lie within 8 % of 5·i
      expect(Math.abs(Math.abs(entry) / (5 * (i + 1)) - 1)).toBeLessThan(0.12);
      expect(subDiagonal(model)[i]! / entry).toBeCloseTo(-1, 1);
    });
  });

  it('calls the forcing active by its rms: 0.002 of the paper is 0.894 of it for 199,901 windows', () => {
    const model = published(LONG, 11);
    expect(model.diagnostics.windows).toBe(199_901);
    expect(0.002 * Math.sqrt(model.diagnostics.windows)).toBeCloseTo(0.894, 3);
    // unit rms is what `coordinates` promises: s/√windows is the rms of the raw projection
    const { coordinates, rank, singularValues } = model;
    for (let k = 0; k < rank; k++) {
      let square = 0;
      for (let row = 0; row < 100; row++) square += coordinates[row * rank + k]! ** 2;
      expect(Math.sqrt(square) * singularValues[k]!).toBeCloseTo(Math.sqrt(199_901), 6);
    }
  });
});
