const scratch = new Float64Array(2);
const scratchWords = new Uint32Array(scratch.buffer);

function mixWords(hash: number, words: Uint32Array, count: number): number {
  let mixed = hash;
  for (let i = 0; i < count; i++) {
    let word = Math.imul(words[i]!, 0xcc9e2d51);
    word = (word << 15) | (word >>> 17);
    mixed ^= Math.imul(word, 0x1b873593);
    mixed = (mixed << 13) | (mixed >>> 19);
    mixed = (Math.imul(mixed, 5) + 0xe6546b64) | 0;
  }
  return mixed;
}

/**
 * 32-bit digest of a frame's content: the mixing steps of MurmurHash3 over the words of (t0, dt), times and
 * values. It tells a frame sent again from another one under the same number; it protects against nothing else.
 *
 * @param t0     time of the first sample, seconds
 * @param dt     seconds between samples
 * @param times  time of each sample or null, seconds
 * @param values NaN where there is no value; NaNs must share one bit pattern
 * @see Appleby 2011, MurmurHash3_x86_32 (public domain)
 */
export function frameDigest(
  t0: number,
  dt: number,
  times: Float64Array | null,
  values: Float64Array,
): number {
  scratch[0] = t0;
  scratch[1] = dt;
  let hash = mixWords(values.length, scratchWords, 4);
  if (times)
    hash = mixWords(
      hash,
      new Uint32Array(times.buffer, times.byteOffset, 2 * times.length),
      2 * times.length,
    );
  hash = mixWords(
    hash,
    new Uint32Array(values.buffer, values.byteOffset, 2 * values.length),
    2 * values.length,
  );
  hash ^= hash >>> 16;
  hash = Math.imul(hash, 0x85ebca6b);
  hash ^= hash >>> 13;
  hash = Math.imul(hash, 0xc2b2ae35);
  return (hash ^ (hash >>> 16)) >>> 0;
}
