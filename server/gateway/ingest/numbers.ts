import { Tag } from 'cbor-x';

/** Numbers copied out of a message, or what is wrong with them. */
export type Numbers = { ok: true; numbers: Float64Array } | { ok: false; detail: string };

const FLOAT16_BIG_ENDIAN = 80;
const FLOAT16_LITTLE_ENDIAN = 84;

/** One half-precision number; see IEEE 754-2019, binary16. */
function halfToDouble(half: number): number {
  const sign = half & 0x8000 ? -1 : 1;
  const exponent = (half >> 10) & 0x1f;
  const fraction = half & 0x3ff;
  if (exponent === 0) return sign * fraction * 2 ** -24;
  if (exponent === 31) return fraction ? Number.NaN : sign * Number.POSITIVE_INFINITY;
  return sign * (1 + fraction / 1024) * 2 ** (exponent - 15);
}

function halvesToDoubles(bytes: Uint8Array, littleEndian: boolean): Float64Array {
  const view = new DataView(bytes.buffer, bytes.byteOffset, bytes.byteLength);
  return Float64Array.from({ length: bytes.length >> 1 }, (_, i) =>
    halfToDouble(view.getUint16(2 * i, littleEndian)),
  );
}

/** A value as it should be read in a sentence: short, and with its kind where that is not evident. */
export function inWords(value: unknown): string {
  if (value === undefined) return 'missing';
  if (typeof value === 'string') return JSON.stringify(value.length > 40 ? `${value.slice(0, 40)}…` : value);
  if (typeof value === 'bigint') return `${value}n`;
  if (Array.isArray(value)) return `an array of ${value.length}`;
  if (ArrayBuffer.isView(value)) return `${value.constructor.name} of ${value.byteLength} bytes`;
  return typeof value === 'object' && value !== null ? 'an object' : String(value);
}

function copyTyped(view: ArrayBufferView, field: string): Numbers {
  if (view instanceof DataView)
    return { ok: false, detail: `${field} is a byte string; send an array of numbers` };
  if (view instanceof BigInt64Array || view instanceof BigUint64Array)
    return { ok: true, numbers: Float64Array.from(view, Number) };
  return { ok: true, numbers: new Float64Array(view as unknown as ArrayLike<number>) };
}

function copyList(list: unknown[], field: string, nulls: boolean): Numbers {
  const numbers = new Float64Array(list.length);
  for (let i = 0; i < list.length; i++) {
    const value = list[i];
    if (typeof value === 'number') numbers[i] = value;
    else if (nulls && value === null) numbers[i] = Number.NaN;
    else if (typeof value === 'bigint') numbers[i] = Number(value);
    else {
      const expected = nulls ? 'numbers, or null where there is no value' : 'numbers';
      return { ok: false, detail: `${field}[${i}] is ${inWords(value)}; send ${expected}` };
    }
  }
  return { ok: true, numbers };
}

/** How many numbers a message's field seems to hold, before any of them is looked at. */
export function countOf(source: unknown): number {
  if (Array.isArray(source)) return source.length;
  if (source instanceof Tag) return ((source.value as { length?: number } | null)?.length ?? 0) / 2;
  return ArrayBuffer.isView(source) ? ((source as unknown as { length?: number }).length ?? 0) : 0;
}

/**
 * Copies a message's numbers, an array or an RFC 8746 typed array of any kind but float128, into a Float64Array
 * of their own: never a view, because a message's memory is unaligned and used again.
 *
 * @param source what the decoder made of the field
 * @param field  its name, for the sentence
 * @param nulls  null stands for a missing value and becomes NaN
 */
export function copyNumbers(source: unknown, field: string, nulls: boolean): Numbers {
  if (Array.isArray(source)) return copyList(source, field, nulls);
  if (source instanceof Tag) {
    const { tag, value } = source as unknown as { tag: number; value: unknown };
    if ((tag === FLOAT16_BIG_ENDIAN || tag === FLOAT16_LITTLE_ENDIAN) && value instanceof Uint8Array)
      return { ok: true, numbers: halvesToDoubles(value, tag === FLOAT16_LITTLE_ENDIAN) };
    return {
      ok: false,
      detail: `${field} carries CBOR tag ${tag}; send a typed array of tags 64 to 86 or an array`,
    };
  }
  if (ArrayBuffer.isView(source)) return copyTyped(source, field);
  return { ok: false, detail: `${field} is ${inWords(source)}; send an array of numbers` };
}
