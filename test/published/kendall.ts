/** What the published checks of rank correlation need, written out plainly. */

/**
 * Kendall's S: concordant less discordant pairs; a pair tied in either counts as neither.
 *
 * @see Kendall 1938, Biometrika 30, p. 81
 */
export function kendallS(x: ArrayLike<number>, y: ArrayLike<number>): number {
  let s = 0;
  for (let i = 0; i < x.length; i++)
    for (let j = 0; j < i; j++) s += Math.sign(x[i]! - x[j]!) * Math.sign(y[i]! - y[j]!);
  return s;
}

/** Kendall's τ with ties allowed for (τ_b): S / √((pairs not tied in x)(pairs not tied in y)). */
export function kendallTau(x: ArrayLike<number>, y: ArrayLike<number>): number {
  return kendallS(x, y) / Math.sqrt(untied(x) * untied(y));
}

const untied = (v: ArrayLike<number>) => {
  let pairs = 0;
  for (let i = 0; i < v.length; i++) for (let j = 0; j < i; j++) if (v[i] !== v[j]) pairs++;
  return pairs;
};

/**
 * The chance of at least `concordant` concordant pairs among n points without ties in random order, from the number of
 * permutations with each number of inversions.
 */
export function concordantChance(n: number, concordant: number): number {
  let ways = [1];
  for (let size = 2; size <= n; size++) {
    const next = new Array<number>(ways.length + size - 1).fill(0);
    ways.forEach((count, inversions) => {
      for (let k = 0; k < size; k++) next[inversions + k]! += count;
    });
    ways = next;
  }
  const all = ways.reduce((sum, count) => sum + count, 0);
  return ways.slice(concordant).reduce((sum, count) => sum + count, 0) / all;
}
