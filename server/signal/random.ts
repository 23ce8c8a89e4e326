/** A seeded source of random numbers; the same seed gives the same numbers on every machine. */
export interface Random {
  /** uniform in [0, 1), 53 bits */
  uniform(): number;
  /** standard normal */
  gaussian(): number;
}

/**
 * The 32-bit FNV-1a digest of a text's UTF-8 bytes: makes a seed of a name.
 *
 * @see Fowler, Noll, Vo, Eastlake, The FNV Non-Cryptographic Hash Algorithm (Internet-Draft draft-eastlake-fnv)
 */
export function seedFromName(name: string): number {
  let digest = 0x811c9dc5;
  for (const byte of new TextEncoder().encode(name)) {
    digest = Math.imul(digest ^ byte, 0x01000193) >>> 0;
  }
  return digest;
}

/**
 * The xoshiro128** generator as a function that returns its next 32-bit unsigned integer.
 *
 * @param state four 32-bit words, not all zero; overwritten with every call
 * @see Blackman, Vigna 2021, ACM Transactions on Mathematical Software 47, 36
 */
export function xoshiro128(state: Uint32Array): () => number {
  if (state.length !== 4 || state.every((word) => word === 0)) {
    throw new RangeError(
      `xoshiro128: state [${state.join(', ')}], expected four words that are not all zero; ` +
        'take them from seedWords',
    );
  }
  return () => {
    const s0 = state[0]!;
    const s1 = state[1]!;
    const result = Math.imul(rotateLeft(Math.imul(s1, 5), 7), 9) >>> 0;
    const t2 = state[2]! ^ s0;
    const t3 = state[3]! ^ s1;
    state[1] = s1 ^ t2;
    state[0] = s0 ^ t3;
    state[2] = t2 ^ (s1 << 9);
    state[3] = rotateLeft(t3, 11);
    return result;
  };
}

function rotateLeft(word: number, bits: number): number {
  return (word << bits) | (word >>> (32 - bits));
}

/**
 * Four well-mixed 32-bit words from one seed: a Weyl sequence through the finalizer of MurmurHash3.
 *
 * @param seed any integer; its lower 32 bits count
 * @see Steele, Lea, Flood 2014, OOPSLA, p. 453 (the way of splitting), with Appleby's 32-bit finalizer
 */
export function seedWords(seed: number): Uint32Array {
  const words = new Uint32Array(4);
  let weyl = seed >>> 0;
  for (let i = 0; i < 4; i++) {
    weyl = (weyl + 0x9e3779b9) >>> 0;
    let word = weyl;
    word = Math.imul(word ^ (word >>> 16), 0x85ebca6b);
    word = Math.imul(word ^ (word >>> 13), 0xc2b2ae35);
    words[i] = word ^ (word >>> 16);
  }
  return words;
}

/**
 * A source of random numbers from a seed or from a name.
 *
 * Gaussians come in pairs by the polar method.
 *
 * @see Marsaglia, Bray 1964, SIAM Review 6, p. 260
 */
export function createRandom(seed: number | string): Random {
  const next = xoshiro128(seedWords(typeof seed === 'string' ? seedFromName(seed) : seed));
  const uniform = () => ((next() >>> 5) * 67108864 + (next() >>> 6)) / 9007199254740992;
  let spare = Number.NaN;
  const gaussian = () => {
    if (!Number.isNaN(spare)) {
      const value = spare;
      spare = Number.NaN;
      return value;
    }
    let u = 0;
    let v = 0;
    let square = 0;
    do {
      u = 2 * uniform() - 1;
      v = 2 * uniform() - 1;
      square = u * u + v * v;
    } while (square >= 1 || square === 0);
    const factor = Math.sqrt((-2 * Math.log(square)) / square);
    spare = v * factor;
    return u * factor;
  };
  return { uniform, gaussian };
}
