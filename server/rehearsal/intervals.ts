import type { Interval } from '../../shared-types/score.ts';
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
