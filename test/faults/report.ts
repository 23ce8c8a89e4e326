/** The whole of the suite (`npm run faults`) tries more of everything. */
export const WHOLE = process.env.FORESHIFT_WHOLE !== undefined;

/** What a fault was tried on and what it cost. */
export interface Cost {
  tried: string;
  /** what had been acknowledged: frames, samples, as `tried` says */
  acknowledged: number;
  lost: number;
  twice: number;
  /** further figures, by name */
  [figure: string]: number | string;
}

/** Prints what was tried, lost and delivered twice. */
export function report({ tried, acknowledged, lost, twice, ...figures }: Cost): void {
  const more = Object.entries(figures).map(([name, figure]) => `, ${name} ${figure}`);
  console.log(`${tried}: ${acknowledged} acknowledged, ${lost} lost, ${twice} twice${more.join('')}`);
}

/** A seeded source of numbers in [0, 1): xorshift32 (Marsaglia 2003, J. Stat. Softw. 8(14)). */
export function chance(seed: number): () => number {
  let state = seed | 0 || 1;
  return () => {
    state ^= state << 13;
    state ^= state >>> 17;
    state ^= state << 5;
    return (state >>> 0) / 2 ** 32;
  };
}

/** How often each of the numbers 0 … n − 1 is missing and how often one is there again, of numbers as they were found. */
export function missingAndTwice(found: Iterable<number>, n: number): { lost: number; twice: number } {
  const counts = new Uint32Array(n);
  for (const number of found) counts[number]!++;
  let [lost, twice] = [0, 0];
  for (const count of counts) {
    if (count === 0) lost++;
    if (count > 1) twice += count - 1;
  }
  return { lost, twice };
}
