import { describe, expect, it } from 'vitest';
import { createRandom } from '../../../server/signal/random.ts';
import { runningAutocorrelationInto, runningVarianceInto } from '../../../server/signal/slidingIndicators.ts';

type Indicator = typeof runningVarianceInto;

function run(indicator: Indicator, values: Float64Array, window: number): Float64Array {
  const out = new Float64Array(values.length);
  indicator(values, window, out);
  return out;
}

const mean = (values: Float64Array) => values.reduce((sum, one) => sum + one, 0) / values.length;
const moment = (a: Float64Array, b: Float64Array) => {
  const [meanA, meanB] = [mean(a), mean(b)];
  return a.reduce((sum, one, i) => sum + (one - meanA) * (b[i]! - meanB), 0);
};
const variance = (values: Float64Array) => moment(values, values) / (values.length - 1);
function correlation(values: Float64Array): number {
  const [a, b] = [values.subarray(0, -1), values.subarray(1)];
  return moment(a, b) / Math.sqrt(moment(a, a) * moment(b, b));
}

/** Luteinizing hormone, 48 values (Diggle 1990), as in base R; its figures below are R's, printed to six digits. */
const LH = Float64Array.from(
  `2.4 2.4 2.4 2.2 2.1 1.5 2.3 2.3 2.5 2.0 1.9 1.7 2.2 1.8 3.2 3.2 2.7 2.2 2.2 1.9 1.9 1.8 2.7 3.0
   2.3 2.0 2.0 2.9 2.9 2.7 2.7 2.3 2.6 2.4 1.8 1.7 1.5 1.4 2.1 3.3 3.5 3.5 3.1 2.6 2.1 3.4 3.0 2.9`.split(
    /\s+/,
  ),
  Number,
);

describe('running indicators', () => {
  it('give what R gives for the first and the last window of 24 of the luteinizing hormone data', () => {
    const correlations = run(runningAutocorrelationInto, LH, 24);
    const deviations = run(runningVarianceInto, LH, 24).map(Math.sqrt);
    expect([correlations[23], correlations[47]]).toEqual([
      expect.closeTo(0.397057, 6),
      expect.closeTo(0.650861, 6),
    ]);
    expect([deviations[23], deviations[47]]).toEqual([
      expect.closeTo(0.448649, 6),
      expect.closeTo(0.620994, 6),
    ]);
  });

  it.each([3, 4, 17, 100])('agree with the definitions written out, window %d, offset or not', (window) => {
    const { gaussian } = createRandom('sliding');
    let level = 0;
    for (const offset of [0, 1e6]) {
      const values = Float64Array.from({ length: 500 }, () => {
        level = 0.9 * level + gaussian();
        return offset + level;
      });
      const variances = run(runningVarianceInto, values, window);
      const correlations = run(runningAutocorrelationInto, values, window);
      for (let i = window - 1; i < values.length; i++) {
        const within = values.subarray(i - window + 1, i + 1);
        expect(variances[i]!).toBeCloseTo(variance(within), 6);
        expect(correlations[i]!).toBeCloseTo(correlation(within), 4);
      }
    }
  });

  it('know nothing before the window is full, nor of the correlation of a constant', () => {
    const values = Float64Array.of(1, 3, 2, 5, 5, 5, 5, 5);
    expect([...run(runningVarianceInto, values, 4).subarray(0, 3)]).toEqual([NaN, NaN, NaN]);
    expect([...run(runningAutocorrelationInto, values, 4).subarray(0, 3)]).toEqual([NaN, NaN, NaN]);
    expect(run(runningVarianceInto, values, 4)[7]).toBe(0);
    expect(run(runningAutocorrelationInto, values, 4)[7]).toBeNaN();
  });

  it('do not look ahead', () => {
    const { gaussian } = createRandom('ahead');
    const values = Float64Array.from({ length: 200 }, gaussian);
    const other = values.map((value, i) => (i < 120 ? value : -7 * value));
    for (const indicator of [runningVarianceInto, runningAutocorrelationInto])
      expect(run(indicator, other, 16).subarray(0, 120)).toEqual(run(indicator, values, 16).subarray(0, 120));
  });
});
