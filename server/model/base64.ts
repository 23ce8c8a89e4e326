const LETTERS = 'ABCDEFGHIJKLMNOPQRSTUVWXYZabcdefghijklmnopqrstuvwxyz0123456789+/';

/** Base64 (RFC 4648) of float64 numbers, little-endian. */
export function encodeFloats(values: Float64Array): string {
  const view = new DataView(new ArrayBuffer(8 * values.length));
  for (let i = 0; i < values.length; i++) view.setFloat64(8 * i, values[i]!, true);
  const length = view.byteLength;
  const parts: string[] = [];
  for (let i = 0; i < length; i += 3) {
    const left = length - i;
    const bits =
      (view.getUint8(i) << 16) |
      ((left > 1 ? view.getUint8(i + 1) : 0) << 8) |
      (left > 2 ? view.getUint8(i + 2) : 0);
    parts.push(
      LETTERS[bits >> 18]!,
      LETTERS[(bits >> 12) & 63]!,
      left > 1 ? LETTERS[(bits >> 6) & 63]! : '=',
      left > 2 ? LETTERS[bits & 63]! : '=',
    );
  }
  return parts.join('');
}

/** Reads back what `encodeFloats` wrote; null when `text` is no base64 of whole float64 numbers. */
export function decodeFloats(text: string): Float64Array | null {
  if (text.length % 4 !== 0 || !/^[A-Za-z0-9+/]*={0,2}$/.test(text)) return null;
  const padding = text.endsWith('==') ? 2 : text.endsWith('=') ? 1 : 0;
  const length = (text.length / 4) * 3 - padding;
  if (length % 8 !== 0) return null;
  const bytes = new Uint8Array(length + 2);
  for (let i = 0, at = 0; i < text.length; i += 4, at += 3) {
    let bits = 0;
    for (let k = 0; k < 4; k++) bits = (bits << 6) | Math.max(0, LETTERS.indexOf(text[i + k]!));
    bytes[at] = bits >> 16;
    bytes[at + 1] = (bits >> 8) & 255;
    bytes[at + 2] = bits & 255;
  }
  const view = new DataView(bytes.buffer);
  return Float64Array.from({ length: length / 8 }, (_, i) => view.getFloat64(8 * i, true));
}
