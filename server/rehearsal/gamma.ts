const HALF_LOG_TWO_PI = 0.5 * Math.log(2 * Math.PI);

/**
 * ln Γ(x) for x > 0: Stirling's series above 10, reached from below by Γ(x + 1) = x Γ(x).
 *
 * @see Abramowitz, Stegun 1964, Handbook of Mathematical Functions, 6.1.40
 */
export function logGamma(x: number): number {
  let shift = 0;
  let y = x;
  while (y < 10) shift += Math.log(y++);
  const q = 1 / (y * y);
  const series =
    (1 / 12 - q * (1 / 360 - q * (1 / 1260 - q * (1 / 1680 - q * (1 / 1188 - (691 / 360360) * q))))) / y;
  return (y - 0.5) * Math.log(y) - y + HALF_LOG_TWO_PI + series - shift;
}

/**
 * The regularised lower incomplete gamma function P(a, x), a > 0, x ≥ 0: by its power series below a + 1, by its
 * continued fraction (evaluated after Lentz) above.
 *
 * @see Abramowitz, Stegun 1964, Handbook of Mathematical Functions, 6.5.29 and 6.5.31
 */
export function lowerGamma(a: number, x: number): number {
  if (x <= 0) return 0;
  const factor = Math.exp(a * Math.log(x) - x - logGamma(a));
  return x < a + 1 ? factor * powerSeries(a, x) : 1 - factor * continuedFraction(a, x);
}

function powerSeries(a: number, x: number): number {
  let term = 1 / a;
  let sum = term;
  for (let n = 1; n < 10_000 && term > sum * 1e-17; n++) {
    term *= x / (a + n);
    sum += term;
  }
  return sum;
}

function continuedFraction(a: number, x: number): number {
  let b = x + 1 - a;
  let c = Number.MAX_VALUE;
  let d = 1 / b;
  let fraction = d;
  for (let n = 1; n < 10_000; n++) {
    const numerator = -n * (n - a);
    b += 2;
    d = 1 / (numerator * d + b);
    c = b + numerator / c;
    fraction *= d * c;
    if (Math.abs(d * c - 1) < 1e-16) break;
  }
  return fraction;
}

/**
 * The x with P(a, x) = share, 0 < share < 1: half the chi-square quantile with 2a degrees of freedom. Newton's method
 * inside a bracket, from the approximation of Wilson and Hilferty.
 *
 * @see Wilson, Hilferty 1931, Proceedings of the National Academy of Sciences 17, p. 684
 */
export function gammaQuantile(a: number, share: number): number {
  let low = 0;
  let high = a + 1;
  while (lowerGamma(a, high) < share) high *= 2;
  const ninth = 1 / (9 * a);
  let x = a * (1 - ninth + approximateNormalQuantile(share) * Math.sqrt(ninth)) ** 3;
  for (let i = 0; i < 200; i++) {
    if (!(x > low && x < high)) x = (low + high) / 2;
    const excess = lowerGamma(a, x) - share;
    if (excess < 0) low = x;
    else high = x;
    const density = Math.exp((a - 1) * Math.log(x) - x - logGamma(a));
    const next = x - excess / density;
    if (Math.abs(next - x) <= 1e-15 * x || high - low <= 1e-15 * high)
      return next > low && next < high ? next : x;
    x = next;
  }
  return x;
}

/** To three digits, as a starting point only. @see Abramowitz, Stegun 1964, Handbook of Mathematical Functions, 26.2.23 */
function approximateNormalQuantile(share: number): number {
  const tail = Math.min(share, 1 - share);
  const t = Math.sqrt(-2 * Math.log(tail));
  const size =
    t - (2.515517 + t * (0.802853 + t * 0.010328)) / (1 + t * (1.432788 + t * (0.189269 + t * 0.001308)));
  return share < 0.5 ? -size : size;
}
