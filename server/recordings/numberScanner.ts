const POWERS = Float64Array.from({ length: 23 }, (_, k) => Number(`1e${k}`));
const MINUS = 45;
const PLUS = 43;

/**
 * The decimal number in bytes [from, to), or NaN where they are not one: sign, digits, one decimal mark, exponent.
 * Up to 15 digits with a power of ten of at most 22 the one division or multiplication is exactly rounded (Clinger
 * 1990, PLDI, "How to read floating point numbers accurately"); longer ones are left to the language.
 *
 * @param decimalMark the byte of the mark: 46 for a point, 44 for a comma
 */
export function scanNumber(bytes: Uint8Array, from: number, to: number, decimalMark: number): number {
  let at = from;
  const sign = bytes[at];
  if (sign === MINUS || sign === PLUS) at++;
  let mantissa = 0;
  let digits = 0;
  let scale = 0;
  let marked = false;
  for (; at < to; at++) {
    const digit = bytes[at]! - 48;
    if (digit >= 0 && digit <= 9) {
      mantissa = mantissa * 10 + digit;
      digits++;
      if (marked) scale--;
    } else if (bytes[at] === decimalMark && !marked) marked = true;
    else break;
  }
  if (digits === 0) return Number.NaN;
  const body = at;
  if (at < to) {
    if ((bytes[at]! | 32) !== 101) return Number.NaN;
    at++;
    const negative = bytes[at] === MINUS;
    if (negative || bytes[at] === PLUS) at++;
    if (at >= to) return Number.NaN;
    let exponent = 0;
    for (; at < to; at++) {
      const digit = bytes[at]! - 48;
      if (digit < 0 || digit > 9) return Number.NaN;
      if (exponent < 10_000) exponent = exponent * 10 + digit;
    }
    scale += negative ? -exponent : exponent;
  }
  if (digits > 15 || scale > 22 || scale < -22) return readLong(bytes, from, body, to, decimalMark);
  const magnitude = scale < 0 ? mantissa / POWERS[-scale]! : mantissa * POWERS[scale]!;
  return sign === MINUS ? -magnitude : magnitude;
}

function readLong(bytes: Uint8Array, from: number, body: number, to: number, decimalMark: number): number {
  let text = '';
  for (let i = from; i < to; i++)
    text += i < body && bytes[i] === decimalMark ? '.' : String.fromCharCode(bytes[i]!);
  return Number(text);
}

/** Whether bytes [from, to) say that there is no value: nothing, or NaN, NA, null, none, inf in any case. */
export function saysNothing(bytes: Uint8Array, from: number, to: number): boolean {
  if (from === to) return true;
  if (to - from > 9) return false;
  let text = '';
  for (let i = from; i < to; i++) text += String.fromCharCode(bytes[i]! | 32);
  return /^(nan|na|n\/a|null|none|[+-]?inf(inity)?)$/.test(text);
}
