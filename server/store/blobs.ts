/** The first `count` numbers of an array as the bytes of a blob (float64, the machine's order: little-endian on all that Node runs on here). */
export function toBlob(numbers: Float64Array, count: number): Uint8Array {
  return new Uint8Array(numbers.buffer, numbers.byteOffset, count * 8);
}

/** The float64 numbers of a blob, in memory of their own. */
export function fromBlob(blob: Uint8Array): Float64Array {
  const numbers = new Float64Array(blob.byteLength / 8);
  new Uint8Array(numbers.buffer).set(blob);
  return numbers;
}

/** Copies a blob's float64 numbers [from, to) to out[at …], whatever the blob's alignment. */
export function copyBlob(blob: Uint8Array, from: number, to: number, out: Float64Array, at: number): void {
  new Uint8Array(out.buffer, out.byteOffset + at * 8, (to - from) * 8).set(blob.subarray(from * 8, to * 8));
}
