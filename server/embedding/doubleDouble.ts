/**
 * Double-double arithmetic on pairs of arrays: entry i stands for high[i] + low[i], about 32 digits.
 *
 * @see Dekker 1971, Numerische Mathematik 18, 224–242 (splitting, products, quotient, root)
 * @see Knuth 1969, The Art of Computer Programming 2, section 4.2.2 (the exact sum of two numbers)
 */
export interface DoubleDoubles {
  high: Float64Array;
  low: Float64Array;
}

/** 2^27 + 1: multiplying by it parts a double into two halves of 26 bits. */
const SPLITTER = 134217729;

/** `length` zeros. */
export function createDoubleDoubles(length: number): DoubleDoubles {
  return { high: new Float64Array(length), low: new Float64Array(length) };
}

/** The leading 26 bits of a double (|a| < 1e300); a − splitHigh(a) is exact. */
export function splitHigh(a: number): number {
  const big = SPLITTER * a;
  return big - (big - a);
}

/** What a·b lost when it was rounded to `product`; exact unless it underflows. */
export function productError(a: number, b: number, product: number): number {
  const aHigh = splitHigh(a);
  const aLow = a - aHigh;
  const bHigh = splitHigh(b);
  const bLow = b - bHigh;
  return aHigh * bHigh - product + aHigh * bLow + aLow * bHigh + aLow * bLow;
}

/** x[at] += high + low. */
export function addAt(x: DoubleDoubles, at: number, high: number, low: number): void {
  const old = x.high[at]!;
  const sum = old + high;
  const part = sum - old;
  const lost = old - (sum - part) + (high - part) + x.low[at]! + low;
  const total = sum + lost;
  x.high[at] = total;
  x.low[at] = lost - (total - sum);
}

/** x[at] += a·b for doubles a and b, without rounding the product. */
export function addProductAt(x: DoubleDoubles, at: number, a: number, b: number): void {
  const product = a * b;
  addAt(x, at, product, productError(a, b, product));
}

/** x[at] −= y[i]·y[j]. */
export function subtractProductAt(
  x: DoubleDoubles,
  at: number,
  y: DoubleDoubles,
  i: number,
  j: number,
): void {
  const a = y.high[i]!;
  const b = y.high[j]!;
  const product = a * b;
  const lost = productError(a, b, product) + (a * y.low[j]! + y.low[i]! * b);
  addAt(x, at, -product, -lost);
}

/** x[at] = √x[at]; x[at] > 0. */
export function squareRootAt(x: DoubleDoubles, at: number): void {
  const high = x.high[at]!;
  const root = Math.sqrt(high);
  const square = root * root;
  const left = high - square - productError(root, root, square) + x.low[at]!;
  const correction = left / (2 * root);
  const total = root + correction;
  x.high[at] = total;
  x.low[at] = correction - (total - root);
}

/** x[at] = x[at] / y[by]; y[by] ≠ 0. */
export function divideAt(x: DoubleDoubles, at: number, y: DoubleDoubles, by: number): void {
  const divisor = y.high[by]!;
  const quotient = x.high[at]! / divisor;
  const product = quotient * divisor;
  const left =
    x.high[at]! - product - productError(quotient, divisor, product) + x.low[at]! - quotient * y.low[by]!;
  const correction = left / divisor;
  const total = quotient + correction;
  x.high[at] = total;
  x.low[at] = correction - (total - quotient);
}
