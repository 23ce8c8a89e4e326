import type { Interval } from '../../shared-types/score.ts';
import { betaQuantile } from './beta.ts';
import { gammaQuantile } from './gamma.ts';

/** Standard normal quantiles for the two-sided confidences in use. */
const NORMAL = { 0.9: 1.6448536269514722, 0.95: 1.959963984540054, 0.99: 2.5758293035489004 } as const;

/** Two-sided confidence levels in use. */
export type Confidence = keyof typeof NORMAL;

/**
 * A share with its Wilson score interval; all null where nothing was counted.
 *
 * @param count of `total`, 0 ≤ count ≤ total
 * @see Wilson 1927, Journal of the American Statistical Association 22, p. 209
 * @see Newcombe 1998, Statistics in Medicine 17, p. 857 (method 3)
 */
export function wilsonInterval(count: number, total: number, confidence: Confidence = 0.95): Interval {
  if (total === 0) return { value: null, low: null, high: null };
  const share = count / total;
  const square = NORMAL[confidence] ** 2;
  const middle = count + square / 2;
  const reach = NORMAL[confidence] * Math.sqrt(count * (1 - share) + square / 4);
  return {
    value: share,
    low: count === 0 ? 0 : (middle - reach) / (total + square),
    high: count === total ? 1 : (middle + reach) / (total + square),
  };
}

/**
 * A share with its Wilson interval, corrected for continuity.
 *
 * @param count of `total`, 0 ≤ count ≤ total
 * @see Newcombe 1998, Statistics in Medicine 17, p. 857 (method 4)
 */
export function correctedWilsonInterval(
  count: number,
  total: number,
  confidence: Confidence = 0.95,
): Interval {
  if (total === 0) return { value: null, low: null, high: null };
  const z = NORMAL[confidence];
  const share = count / total;
  const middle = 2 * count + z * z;
  const reach = (sign: number) =>
    1 + z * Math.sqrt(z * z + 2 * sign - 1 / total + 4 * share * (total * (1 - share) - sign));
  return {
    value: share,
    low: count === 0 ? 0 : Math.max(0, (middle - reach(-1)) / (2 * (total + z * z))),
    high: count === total ? 1 : Math.min(1, (middle + reach(1)) / (2 * (total + z * z))),
  };
}

/**
 * A share ± z standard errors: what is often seen, and too short near 0 and 1, where it also leaves that range.
 *
 * @param count of `total`, 0 ≤ count ≤ total
 * @see Newcombe 1998, Statistics in Medicine 17, p. 857 (method 1)
 */
export function waldInterval(count: number, total: number, confidence: Confidence = 0.95): Interval {
  if (total === 0) return { value: null, low: null, high: null };
  const share = count / total;
  const reach = NORMAL[confidence] * Math.sqrt((share * (1 - share)) / total);
  return { value: share, low: share - reach, high: share + reach };
}

/**
 * A share with its exact interval: each limit is the chance at which the count or one further out has half of what the
 * confidence leaves.
 *
 * @param count of `total`, 0 ≤ count ≤ total
 * @see Clopper, Pearson 1934, Biometrika 26, p. 404
 */
export function clopperPearsonInterval(
  count: number,
  total: number,
  confidence: Confidence = 0.95,
): Interval {
  if (total === 0) return { value: null, low: null, high: null };
  const tail = (1 - confidence) / 2;
  return {
    value: count / total,
    low: count === 0 ? 0 : betaQuantile(count, total - count + 1, tail),
    high: count === total ? 1 : betaQuantile(count + 1, total - count, 1 - tail),
  };
}

/**
 * A rate with its exact Poisson interval; all null where no time passed.
 *
 * @param count    events seen
 * @param exposure how long they were counted; the rate is per this unit
 * @see Garwood 1936, Biometrika 28, p. 437
 */
export function garwoodInterval(count: number, exposure: number, confidence: Confidence = 0.95): Interval {
  if (!(exposure > 0)) return { value: null, low: null, high: null };
  const tail = (1 - confidence) / 2;
  return {
    value: count / exposure,
    low: count === 0 ? 0 : gammaQuantile(count, tail) / exposure,
    high: gammaQuantile(count + 1, 1 - tail) / exposure,
  };
}
