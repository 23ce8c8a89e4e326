import { describe, expect, it } from 'vitest';
import { createRandom, seedFromName, seedWords, xoshiro128 } from '../../../server/signal/random.ts';

/** xoshiro128** in integers of any size: slow, and obvious beside the paper's C code. */
function slowXoshiro(seed: bigint[]): () => number {
  const mask = 0xffffffffn;
  const rotate = (word: bigint, bits: bigint) => ((word << bits) | (word >> (32n - bits))) & mask;
  const s = [...seed] as [bigint, bigint, bigint, bigint];
  return () => {
    const result = (rotate((s[1] * 5n) & mask, 7n) * 9n) & mask;
    const t = (s[1] << 9n) & mask;
    s[2] ^= s[0];
    s[3] ^= s[1];
    s[1] ^= s[2];
    s[0] ^= s[3];
    s[2] ^= t;
    s[3] = rotate(s[3], 11n);
    return Number(result);
  };
}

describe('random numbers', () => {
  it('digests names as FNV-1a prescribes', () => {
    // test vectors of draft-eastlake-fnv, 32-bit FNV-1a
    expect(seedFromName('')).toBe(0x811c9dc5);
    expect(seedFromName('a')).toBe(0xe40c292c);
    expect(seedFromName('foobar')).toBe(0xbf9cf968);
  });

  it('generates the same words as xoshiro128** written out in big integers', () => {
    for (const seed of [[1, 2, 3, 4], [...seedWords(0)], [...seedWords(2 ** 31 + 7)]]) {
      const fast = xoshiro128(Uint32Array.from(seed));
      const slow = slowXoshiro(seed.map(BigInt));
      for (let i = 0; i < 1000; i++) expect(fast()).toBe(slow());
    }
  });

  it('starts from 1, 2, 3, 4 with the word that the definition gives by hand', () => {
    // rotl(2 · 5, 7) · 9 = 1280 · 9
    expect(xoshiro128(Uint32Array.of(1, 2, 3, 4))()).toBe(11520);
  });

  it('refuses a state of zeros, from which nothing would ever come', () => {
    expect(() => xoshiro128(new Uint32Array(4))).toThrow(RangeError);
  });

  it('gives the same numbers for the same seed and others for another', () => {
    const first = createRandom('alder');
    const again = createRandom('alder');
    const other = createRandom('birch');
    const draws = Array.from({ length: 20 }, () => first.uniform());
    expect(draws).toEqual(Array.from({ length: 20 }, () => again.uniform()));
    expect(draws).not.toEqual(Array.from({ length: 20 }, () => other.uniform()));
  });

  it('has the moments of the uniform and the normal law within five standard errors', () => {
    const random = createRandom(20);
    const count = 200_000;
    const sums = [0, 0, 0, 0, 0];
    let outside = 0;
    for (let i = 0; i < count; i++) {
      const u = random.uniform();
      const g = random.gaussian();
      if (!(u >= 0 && u < 1)) outside++;
      [u - 0.5, g, g * g - 1, g ** 3, g ** 4 - 3].forEach((value, k) => {
        sums[k] = sums[k]! + value;
      });
    }
    expect(outside).toBe(0);
    const errors = [1 / 12, 1, 2, 15, 96].map((variance) => 5 * Math.sqrt(variance / count));
    errors.forEach((error, k) => {
      expect(Math.abs(sums[k]! / count)).toBeLessThan(error);
    });
  });
});
