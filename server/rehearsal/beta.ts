import { logGamma } from './gamma.ts';

/**
 * The regularised incomplete beta function I_x(a, b), a, b > 0, 0 ≤ x ≤ 1, by its continued fraction (evaluated after
 * Lentz), on the side on which that converges fast. For whole a and n = a + b − 1 it is the chance of at least a
 * successes in n trials of chance x.
 *
 * @see Abramowitz, Stegun 1964, Handbook of Mathematical Functions, 26.5.8 and 26.5.24
 */
export function incompleteBeta(a: number, b: number, x: number): number {
  if (x <= 0) return 0;
  if (x >= 1) return 1;
  if (x > (a + 1) / (a + b + 2)) return 1 - incompleteBeta(b, a, 1 - x);
  const logFactor =
    logGamma(a + b) - logGamma(a) - logGamma(b) + a * Math.log(x) + b * Math.log1p(-x) - Math.log(a);
  return Math.exp(logFactor) / betaFraction(a, b, x);
}

/** 1 + d₁/(1 + d₂/(1 + …)). */
function betaFraction(a: number, b: number, x: number): number {
  let c = 1;
  let d = 0;
  let fraction = 1;
  for (let k = 1; k < 10_000; k++) {
    const m = k >> 1;
    const numerator =
      k % 2 === 0
        ? (m * (b - m) * x) / ((a + 2 * m - 1) * (a + 2 * m))
        : (-(a + m) * (a + b + m) * x) / ((a + 2 * m) * (a + 2 * m + 1));
    d = 1 / (1 + numerator * d);
    c = 1 + numerator / c;
    fraction *= c * d;
    if (Math.abs(c * d - 1) < 1e-16) break;
  }
  return fraction;
}

/** The x with I_x(a, b) = share, by halving; to the last digit or so. */
export function betaQuantile(a: number, b: number, share: number): number {
  let low = 0;
  let high = 1;
  for (;;) {
    const middle = (low + high) / 2;
    if (middle <= low || middle >= high) return middle;
    if (incompleteBeta(a, b, middle) < share) low = middle;
    else high = middle;
  }
}
