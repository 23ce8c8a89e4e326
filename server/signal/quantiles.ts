/**
 * Quantile of the standard normal law, by Newton's method on its distribution function.
 *
 * @param p in (1e-8, 1 − 1e-8)
 * @see Marsaglia 2004, Journal of Statistical Software 11(4) (the series)
 */
export function normalQuantile(p: number): number {
  let x = 0;
  for (let i = 0; i < 100; i++) {
    const step = (normalDistribution(x) - p) / (Math.exp((-x * x) / 2) / Math.sqrt(2 * Math.PI));
    // a full step from far in the flank may overshoot
    x -= Math.max(-1, Math.min(1, step));
    if (Math.abs(step) < 1e-14 * (1 + Math.abs(x))) break;
  }
  return x;
}

/** Distribution function of the standard normal law; |x| < 7. */
export function normalDistribution(x: number): number {
  let term = x;
  let sum = x;
  for (let k = 3; Math.abs(term) > 1e-17 * Math.abs(sum); k += 2) {
    term *= (x * x) / k;
    sum += term;
  }
  return 0.5 + (sum * Math.exp((-x * x) / 2)) / Math.sqrt(2 * Math.PI);
}

/**
 * Quantile of the F law with d1 and d2 degrees of freedom.
 *
 * @param p in (0, 1)
 */
export function fQuantile(p: number, d1: number, d2: number): number {
  let low = 0;
  let high = 1;
  for (let i = 0; i < 60; i++) {
    const middle = (low + high) / 2;
    if (incompleteBeta(middle, d1 / 2, d2 / 2) < p) low = middle;
    else high = middle;
  }
  const share = (low + high) / 2;
  return (d2 * share) / (d1 * (1 - share));
}

/**
 * Regularised incomplete beta function I_x(a, b), by its continued fraction.
 *
 * @see Abramowitz and Stegun 1964, Handbook of Mathematical Functions, 26.5.8
 * @see Lentz 1976, Applied Optics 15, 668–671 (evaluation)
 */
export function incompleteBeta(x: number, a: number, b: number): number {
  if (x <= 0) return 0;
  if (x >= 1) return 1;
  if (x > (a + 1) / (a + b + 2)) return 1 - incompleteBeta(1 - x, b, a);
  const front =
    Math.exp(logGamma(a + b) - logGamma(a) - logGamma(b) + a * Math.log(x) + b * Math.log1p(-x)) / a;
  let c = 1;
  let d = 1 / Math.max(1e-300, 1 - ((a + b) * x) / (a + 1));
  let fraction = d;
  for (let m = 1; m < 10_000; m++) {
    const even = (m * (b - m) * x) / ((a + 2 * m - 1) * (a + 2 * m));
    d = 1 / (1 + even * d);
    c = 1 + even / c;
    fraction *= d * c;
    const odd = (-(a + m) * (a + b + m) * x) / ((a + 2 * m) * (a + 2 * m + 1));
    d = 1 / (1 + odd * d);
    c = 1 + odd / c;
    fraction *= d * c;
    if (Math.abs(d * c - 1) < 1e-15) break;
  }
  return front * fraction;
}

/** ln Γ(x) for x > 0, by Stirling's series after raising x above 10; Abramowitz and Stegun 1964, 6.1.41. */
export function logGamma(x: number): number {
  let shift = 0;
  let z = x;
  for (; z < 10; z++) shift += Math.log(z);
  const inverse = 1 / z;
  const square = inverse * inverse;
  const series =
    inverse *
    (1 / 12 -
      square *
        (1 / 360 -
          square * (1 / 1260 - square * (1 / 1680 - square * (1 / 1188 - (square * 691) / 360360)))));
  return (z - 0.5) * Math.log(z) - z + 0.5 * Math.log(2 * Math.PI) + series - shift;
}
