/**
 * NIST Statistical Reference Datasets, univariate summary statistics, itl.nist.gov/div898/strd. Certified values as
 * printed (15 digits), confirmed in exact rational arithmetic:
 *
 *   set        n     mean               standard deviation (n − 1)   lag-1 autocorrelation
 *   Lew        200   -177.435000000000  277.332168044316             -0.307304800605679
 *   Lottery    218   518.958715596330   291.699727470969             -0.120948622967393
 *   Mavro      50    2.00185600000000   0.000429123454003053         0.937989183438248
 *   Michelso   100   299.852400000000   0.0790105478190518           0.535199668621283
 *   NumAcc1    3     10000002           1                            -0.5
 *   NumAcc2    1001  1.2                0.1                          -0.999
 *   NumAcc3    1001  1000000.2          0.1                          -0.999
 *   NumAcc4    1001  10000000.2         0.1                          -0.999
 *
 * The digits asked for are those a careful two-pass computation reaches in float64: the decimal data themselves are
 * rounded when they are stored, which costs NumAcc3 and NumAcc4 theirs.
 */
import { readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';
import {
  addToMoments,
  createMoments,
  deviationOf,
  lagOneAutocorrelation,
  meanOf,
} from '../../server/signal/statistics.ts';

const file = JSON.parse(readFileSync(new URL('../data/nist-strd-univariate.json', import.meta.url), 'utf8'));

const alternating = (first: number, odd: number, even: number): number[] => [
  first,
  ...Array.from({ length: 1000 }, (_, i) => (i % 2 === 0 ? odd : even)),
];

const SETS: {
  name: string;
  data: number[];
  certified: [number, number, number];
  digits: [number, number, number];
}[] = [
  {
    name: 'Lew',
    data: file.Lew,
    certified: [-177.435, 277.332168044316, -0.307304800605679],
    digits: [14.5, 14.5, 14],
  },
  {
    name: 'Lottery',
    data: file.Lottery,
    certified: [518.95871559633, 291.699727470969, -0.120948622967393],
    digits: [14.5, 14.5, 14],
  },
  {
    name: 'Mavro',
    data: file.Mavro,
    certified: [2.001856, 0.000429123454003053, 0.937989183438248],
    digits: [14.5, 13, 13],
  },
  {
    name: 'Michelso',
    data: file.Michelso,
    certified: [299.8524, 0.0790105478190518, 0.535199668621283],
    digits: [14.5, 13.4, 13],
  },
  {
    name: 'NumAcc1',
    data: [10000001, 10000003, 10000002],
    certified: [10000002, 1, -0.5],
    digits: [15, 15, 15],
  },
  {
    name: 'NumAcc2',
    data: alternating(1.2, 1.1, 1.3),
    certified: [1.2, 0.1, -0.999],
    digits: [14.5, 14, 14],
  },
  {
    name: 'NumAcc3',
    data: alternating(1000000.2, 1000000.1, 1000000.3),
    certified: [1000000.2, 0.1, -0.999],
    digits: [14.5, 9.4, 11],
  },
  {
    name: 'NumAcc4',
    data: alternating(10000000.2, 10000000.1, 10000000.3),
    certified: [10000000.2, 0.1, -0.999],
    digits: [14.5, 8.2, 10],
  },
];

/** Decimal digits of agreement, at most 15. */
const agreement = (value: number, certified: number): number =>
  value === certified ? 15 : Math.min(15, -Math.log10(Math.abs(value - certified) / Math.abs(certified)));

describe('NIST univariate summary statistics', () => {
  it.each(SETS)(
    'the running mean and deviation and the autocorrelation of $name keep their digits',
    ({ data, certified, digits }) => {
      const moments = createMoments();
      for (const value of data) addToMoments(moments, value);
      expect(moments.count).toBe(data.length);
      expect(agreement(meanOf(moments), certified[0])).toBeGreaterThanOrEqual(digits[0]);
      expect(agreement(deviationOf(moments), certified[1])).toBeGreaterThanOrEqual(digits[1]);
      expect(agreement(lagOneAutocorrelation(Float64Array.from(data)), certified[2])).toBeGreaterThanOrEqual(
        digits[2],
      );
    },
  );
});
