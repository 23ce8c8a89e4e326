/**
 * Running mean and sum of squared deviations. Both carry the rounding error of their sums along (Neumaier), so that a
 * mean a million times the spread leaves the spread its digits.
 *
 * @see Welford 1962, Technometrics 4, 419–420
 * @see Neumaier 1974, Zeitschrift für Angewandte Mathematik und Mechanik 54, 39–51
 */
export interface RunningMoments {
  count: number;
  /** the first value; deviations from it are summed, which loses nothing where values lie close together */
  origin: number;
  mean: number;
  /** Σ(x − mean)² */
  squares: number;
  meanLost: number;
  squaresLost: number;
}

export const createMoments = (): RunningMoments => ({
  count: 0,
  origin: 0,
  mean: 0,
  squares: 0,
  meanLost: 0,
  squaresLost: 0,
});

/** Takes one value. `mean` in the state is relative to `origin`; see `meanOf`. */
export function addToMoments(state: RunningMoments, value: number): void {
  if (state.count === 0) state.origin = value;
  state.count++;
  const x = value - state.origin;
  const before = x - state.mean - state.meanLost;
  const step = before / state.count;
  const mean = state.mean + step;
  state.meanLost +=
    Math.abs(state.mean) >= Math.abs(step) ? state.mean - mean + step : step - mean + state.mean;
  state.mean = mean;
  const product = before * (x - mean - state.meanLost);
  const squares = state.squares + product;
  state.squaresLost +=
    state.squares >= product ? state.squares - squares + product : product - squares + state.squares;
  state.squares = squares;
}

/** Mean of the values so far; NaN before the first. */
export function meanOf(state: RunningMoments): number {
  return state.count === 0 ? Number.NaN : state.origin + (state.mean + state.meanLost);
}

/** Standard deviation with n − 1; NaN below two values. */
export function deviationOf(state: RunningMoments): number {
  return state.count < 2 ? Number.NaN : Math.sqrt((state.squares + state.squaresLost) / (state.count - 1));
}

/**
 * Lag-1 autocorrelation r₁ = Σ(x_t − x̄)(x_{t+1} − x̄) / Σ(x_t − x̄)².
 *
 * @param values at least two, not all equal (NaN otherwise)
 * @see Box and Jenkins 1976, Time Series Analysis, p. 32
 */
export function lagOneAutocorrelation(values: Float64Array): number {
  const moments = createMoments();
  for (const value of values) addToMoments(moments, value);
  const { origin } = moments;
  const mean = moments.mean + moments.meanLost;
  let products = 0;
  let lost = 0;
  for (let i = 0; i + 1 < values.length; i++) {
    const product = (values[i]! - origin - mean) * (values[i + 1]! - origin - mean);
    const sum = products + product;
    lost += Math.abs(products) >= Math.abs(product) ? products - sum + product : product - sum + products;
    products = sum;
  }
  return (products + lost) / (moments.squares + moments.squaresLost);
}

/** Median; the mean of the two middle values for an even count, NaN for none. `values` stays as it is. */
export function median(values: Float64Array): number {
  const sorted = Float64Array.from(values).sort();
  const half = sorted.length >> 1;
  return sorted.length % 2 === 1 ? sorted[half]! : (sorted[half - 1]! + sorted[half]!) / 2;
}

/** Excess kurtosis m₄/m₂² − 3 with moments about the mean divided by n; NaN for constant values. */
export function excessKurtosis(values: Float64Array): number {
  const moments = createMoments();
  for (const value of values) addToMoments(moments, value);
  const mean = meanOf(moments);
  let fourth = 0;
  for (const value of values) fourth += (value - mean) ** 4;
  const second = (moments.squares + moments.squaresLost) / values.length;
  return fourth / values.length / (second * second) - 3;
}
