/**
 * M. Hollander, D. A. Wolfe (1973), Nonparametric Statistical Methods, Wiley, pp. 185–194: Kendall's τ for two ways of
 * grading nine lots of canned tuna. τ = 4/9, 26 concordant pairs, exact one-sided p 0.0597194665, two-sided
 * 0.119438932981: recomputed with base R, whose help for `cor.test` has the example. The variance without
 * association, 2(2n + 5)/(9n(n − 1)), is exact.
 */
import { describe, expect, it } from 'vitest';
import { createRandom } from '../../server/signal/random.ts';
import { concordantChance, kendallS, kendallTau } from './kendall.ts';

const X = [44.4, 45.9, 41.9, 53.3, 44.7, 44.1, 50.7, 45.2, 60.1];
const Y = [2.6, 3.1, 2.5, 5.0, 3.6, 4.0, 5.2, 2.8, 3.8];

describe('Hollander and Wolfe 1973: nine lots of tuna', () => {
  it('have τ = 4/9 and 26 concordant pairs of 36', () => {
    expect(kendallTau(X, Y)).toBeCloseTo(4 / 9, 12);
    expect((kendallS(X, Y) + 36) / 2).toBe(26);
  });

  it('have the exact p-values 0.0597194665 and 0.119438932981', () => {
    const oneSided = concordantChance(9, 26);
    expect(Math.abs(oneSided - 0.0597194665)).toBeLessThan(5e-11);
    expect(Math.abs(2 * oneSided - 0.119438932981)).toBeLessThan(5e-13);
  });

  it('would without association vary by 2(2n + 5)/(9n(n − 1))', () => {
    const n = 20;
    const runs = 10_000;
    const { uniform } = createRandom('tau');
    let square = 0;
    for (let run = 0; run < runs; run++) {
      const y = Float64Array.from({ length: n }, uniform);
      square += kendallTau([...y.keys()], y) ** 2;
    }
    // a variance from 10 000 nearly normal values: relative standard error √(2/10 000) = 0.014
    expect(Math.abs(square / runs / 0.0263158 - 1)).toBeLessThan(5 * 0.0142);
  });
});
