import { describe, expect, it } from 'vitest';
import {
  addAt,
  addProductAt,
  createDoubleDoubles,
  divideAt,
  productError,
  splitHigh,
  squareRootAt,
  subtractProductAt,
} from '../../../server/embedding/doubleDouble.ts';

/** A double as an exact fraction over 2^200. */
const exact = (value: number): bigint => {
  let scaled = value;
  let shift = 200;
  while (!Number.isInteger(scaled)) {
    scaled *= 2;
    shift--;
  }
  return BigInt(scaled) << BigInt(shift);
};

describe('double-double arithmetic', () => {
  it('splits a double into halves whose sum is exact', () => {
    for (const value of [Math.PI, 1 / 3, -1e10 / 7, 0]) {
      const high = splitHigh(value);
      expect(high + (value - high)).toBe(value);
      expect(splitHigh(high)).toBe(high);
    }
  });

  it('knows what a product lost, exactly', () => {
    const a = 1 / 3;
    const b = Math.PI;
    const product = a * b;
    const error = productError(a, b, product);
    expect(error).not.toBe(0);
    expect((exact(a) * exact(b)) >> 200n).toBe(exact(product) + exact(error));
  });

  it('adds small to large without loss and takes it off again', () => {
    const x = createDoubleDoubles(1);
    addAt(x, 0, 1e16, 0);
    addAt(x, 0, 1.25, 0);
    addAt(x, 0, -1e16, 0);
    expect(x.high[0]).toBe(1.25);
  });

  it('takes roots and quotients that multiply back to 30 digits', () => {
    const x = createDoubleDoubles(3);
    addAt(x, 0, 2, 1e-20);
    x.high[1] = x.high[0]!;
    x.low[1] = x.low[0]!;
    squareRootAt(x, 1);
    subtractProductAt(x, 0, x, 1, 1);
    expect(Math.abs(x.high[0]!)).toBeLessThan(1e-30);
    const y = createDoubleDoubles(2);
    addAt(y, 0, 1, 0);
    addAt(y, 1, 3, 0);
    divideAt(y, 0, y, 1);
    const rest = createDoubleDoubles(1);
    addAt(rest, 0, 1, 0);
    subtractProductAt(rest, 0, y, 0, 1);
    expect(Math.abs(rest.high[0]!)).toBeLessThan(1e-31);
  });

  it('sums products of doubles without rounding them', () => {
    const x = createDoubleDoubles(1);
    addProductAt(x, 0, 1 + 2 ** -30, 1 + 2 ** -30);
    addProductAt(x, 0, -1, 1 + 2 ** -29);
    expect(x.high[0]).toBe(2 ** -60);
  });
});
