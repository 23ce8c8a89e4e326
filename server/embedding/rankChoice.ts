/** Singular values below this share of the first are not counted: coordinates made of doubles carry no more. */
const ROUNDING_FLOOR = 1e-8;

/** A rank and how it was found, in words. */
export interface RankChoice {
  rank: number;
  words: string;
}

/**
 * Optimal hard threshold for known noise in units of √n·σ:
 * λ*(β) = √(2(β + 1) + 8β/((β + 1) + √(β² + 14β + 1))).
 *
 * @param aspect β = rows/columns, in (0, 1]
 * @see Gavish and Donoho 2014, IEEE Transactions on Information Theory 60, 5040–5053
 */
export function optimalThreshold(aspect: number): number {
  const sum = aspect + 1;
  return Math.sqrt(2 * sum + (8 * aspect) / (sum + Math.sqrt(aspect * aspect + 14 * aspect + 1)));
}

/**
 * Median of the Marchenko–Pastur law, the law of the squared singular values of a noise matrix (variance 1/columns).
 * The law's upper tail is integrated over an angle, x = 1 + β + 2√β·cos θ, where it is smooth.
 *
 * @param aspect β = rows/columns, in (0, 1]
 * @see Marčenko and Pastur 1967, Mathematics of the USSR-Sbornik 1, 457–483
 */
export function marchenkoPasturMedian(aspect: number): number {
  const centre = 1 + aspect;
  const half = 2 * Math.sqrt(aspect);
  const density = (angle: number) =>
    (half * half * Math.sin(angle) ** 2) / (2 * Math.PI * aspect * (centre + half * Math.cos(angle)));
  // the median lies above the mean of the ends for every β ≤ 1, so that the far end, singular at β = 1, is not needed
  let low = 0;
  let high = 0.9 * Math.PI;
  for (let i = 0; i < 60; i++) {
    const middle = (low + high) / 2;
    if (simpson(density, 0, middle) < 0.5) low = middle;
    else high = middle;
  }
  return centre + half * Math.cos((low + high) / 2);
}

/**
 * Optimal hard threshold for unknown noise in units of the median singular value: ω(β) = λ*(β)/√μ_β.
 *
 * @param aspect β = rows/columns, in (0, 1]
 * @see Gavish and Donoho 2014; the integral is computed, not their cubic fit to it
 */
export function medianThreshold(aspect: number): number {
  return optimalThreshold(aspect) / Math.sqrt(marchenkoPasturMedian(aspect));
}

/**
 * Noise floor of singular values: ω(β) times their median, but no less than what rounding leaves (1e-8 of the first).
 *
 * @param singularValues descending, all of them, zeros included
 * @param columns        windows
 * @returns the floor in the unit of the singular values, ω, and whether rounding sets it
 */
export function noiseFloor(
  singularValues: Float64Array,
  columns: number,
): { floor: number; omega: number; rounding: boolean } {
  const rows = singularValues.length;
  const half = rows >> 1;
  const median =
    rows % 2 === 1 ? singularValues[half]! : (singularValues[half - 1]! + singularValues[half]!) / 2;
  const omega = medianThreshold(Math.min(rows, columns) / Math.max(rows, columns));
  const least = ROUNDING_FLOOR * singularValues[0]!;
  return { floor: Math.max(omega * median, least), omega, rounding: omega * median < least };
}

/**
 * Rank above the noise floor: the number of singular values above ω(β) times their median, at least 2 (one coordinate
 * and the forcing).
 *
 * @param singularValues descending, all of them, zeros included
 * @param columns        windows
 */
export function chooseRank(singularValues: Float64Array, columns: number): RankChoice {
  const { floor, omega, rounding } = noiseFloor(singularValues, columns);
  let rank = 0;
  while (rank < singularValues.length && singularValues[rank]! > floor) rank++;
  const limit = rounding ? ', and above 1e-8 of the first, all that rounding leaves' : '';
  return {
    rank: Math.max(2, rank),
    words:
      `${rank} singular values above ${omega.toFixed(3)} × their median (Gavish and Donoho 2014)${limit}${rank < 2 ? '; raised to 2' : ''}; ` +
      'a rule for independent noise, which the noise in a Hankel matrix is not: a first guess, to be checked by a rehearsal',
  };
}

function simpson(f: (x: number) => number, from: number, to: number): number {
  const intervals = 400;
  const step = (to - from) / intervals;
  let sum = f(from) + f(to);
  for (let i = 1; i < intervals; i++) sum += (i % 2 === 1 ? 4 : 2) * f(from + i * step);
  return (sum * step) / 3;
}
