import { Matrix, SingularValueDecomposition } from 'ml-matrix';
import { describe, expect, it } from 'vitest';
import {
  hankelVectors,
  vectorsByLaggedProducts,
  vectorsByQr,
} from '../../../server/embedding/hankelVectors.ts';
import { laggedProducts } from '../../../server/embedding/laggedProducts.ts';
import { countWindows, type Runs } from '../../../server/embedding/runs.ts';
import { lorenzSeries, lorenzStates } from '../../../server/rigs/lorenz.ts';
import { createRandom } from '../../../server/rigs/random.ts';
import { column } from '../../../server/rigs/rungeKutta.ts';

/** The slow, obvious matrix: row (c·delays + j), one column a window. */
function explicitHankel({ samples, means, weights }: Runs, delays: number): Matrix {
  const columns: number[][] = [];
  for (const run of samples) {
    for (let newest = delays - 1; newest < run[0]!.length; newest++) {
      columns.push(
        run.flatMap((values, c) =>
          Array.from({ length: delays }, (_, j) => (values[newest - j]! - means[c]!) * weights[c]!),
        ),
      );
    }
  }
  return new Matrix(columns).transpose();
}

const { gaussian } = createRandom(11);
const noise = (length: number): Float64Array => Float64Array.from({ length }, gaussian);
const states = lorenzStates({ start: [-8, 8, 27], step: 0.01, every: 2, samples: 900 });
const noisy = (values: Float64Array): Float64Array => values.map((value) => value + 0.05 * gaussian());
const x = noisy(column(states, 3, 0));
const z = noisy(column(states, 3, 2));

const CASES: { name: string; runs: Runs; delays: number }[] = [
  {
    name: 'one run of noise',
    runs: { samples: [[noise(300)]], means: Float64Array.of(0.1), weights: Float64Array.of(1) },
    delays: 9,
  },
  {
    name: 'one run with an even number of delays',
    runs: { samples: [[x]], means: Float64Array.of(0), weights: Float64Array.of(1) },
    delays: 12,
  },
  {
    name: 'four runs, one too short for a window',
    runs: {
      samples: [[x.slice(0, 200)], [x.slice(250, 255)], [x.slice(300, 312)], [x.slice(400)]],
      means: Float64Array.of(1),
      weights: Float64Array.of(1),
    },
    delays: 7,
  },
  {
    name: 'two channels in two runs',
    runs: {
      samples: [
        [x.slice(0, 400), z.slice(0, 400)],
        [x.slice(430), z.slice(430)],
      ],
      means: Float64Array.of(0.3, 23),
      weights: Float64Array.of(0.12, 0.11),
    },
    delays: 6,
  },
];

describe('Hankel singular vectors', () => {
  it.each(CASES)('lagged products are H times its transpose: $name', ({ runs, delays }) => {
    const hankel = explicitHankel(runs, delays);
    const expected = hankel.mmul(hankel.transpose()).to1DArray();
    const { high } = laggedProducts(runs, delays);
    const scale = Math.max(...expected.map(Math.abs));
    for (const [i, value] of expected.entries())
      expect(Math.abs(high[i]! - value)).toBeLessThan(1e-12 * scale);
  });

  describe.each(Object.entries({ vectorsByLaggedProducts, vectorsByQr }))('%s', (_, vectorsOf) => {
    it.each(CASES)('agrees with an SVD of the explicit matrix: $name', ({ runs, delays }) => {
      const hankel = explicitHankel(runs, delays);
      const oracle = new SingularValueDecomposition(hankel.transpose());
      const found = vectorsOf(runs, delays);
      expect(found.windows).toBe(hankel.columns);
      expect(found.windows).toBe(countWindows(runs, delays));
      for (let k = 0; k < found.rows; k++) {
        expect(Math.abs(found.singularValues[k]! / oracle.diagonal[k]! - 1)).toBeLessThan(1e-11);
        let overlap = 0;
        for (let i = 0; i < found.rows; i++) {
          overlap += found.vectors[k * found.rows + i]! * oracle.rightSingularVectors.get(i, k);
        }
        expect(Math.abs(Math.abs(overlap) - 1)).toBeLessThan(1e-10);
      }
    });

    it.each(CASES)('makes the largest entry of every vector positive: $name', ({ runs, delays }) => {
      const { vectors, rows, found } = vectorsOf(runs, delays);
      for (let k = 0; k < found; k++) {
        const vector = vectors.subarray(k * rows, (k + 1) * rows);
        const largest = vector.reduce((a, b) => (Math.abs(b) > Math.abs(a) ? b : a), 0);
        expect(largest).toBeGreaterThan(0);
      }
    });

    it('keeps its digits under an offset a million times the spread, once centred', () => {
      const offset = 1e6 * 8;
      const plain = { samples: [[x]], means: Float64Array.of(0), weights: Float64Array.of(1) };
      const shifted = {
        ...plain,
        samples: [[x.map((value) => value + offset)]],
        means: Float64Array.of(offset),
      };
      const a = vectorsOf(plain, 12).singularValues;
      const b = vectorsOf(shifted, 12).singularValues;
      // adding the offset rounds every sample to 1e-9
      for (let k = 0; k < 12; k++) expect(Math.abs(a[k]! - b[k]!)).toBeLessThan(1e-7);
    });
  });

  it('both methods agree where both reach, and the wanted depth chooses between them', () => {
    const smooth = lorenzSeries({ start: [-8, 8, 27], step: 0.001, every: 1, samples: 10_000 });
    const runs = { samples: [[smooth]], means: Float64Array.of(0), weights: Float64Array.of(1) };
    const fast = vectorsByLaggedProducts(runs, 100);
    const slow = vectorsByQr(runs, 100);
    for (let k = 0; k < 10; k++) {
      const depth = fast.singularValues[k]! / fast.singularValues[0]!;
      // QR is good to about 1e-16 of the first singular value
      expect(Math.abs(fast.singularValues[k]! / slow.singularValues[k]! - 1)).toBeLessThan(
        3e-15 / depth + 3e-14,
      );
    }
    expect(hankelVectors(runs, 100, () => 11).method).toBe('lagged products (double-double)');
    expect(hankelVectors(runs, 100, () => 15).method).toBe('orthogonal (QR)');
  });
});
