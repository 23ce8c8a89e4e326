/**
 * Running variance over the last `window` samples, that of a sample (divided by window − 1):
 * out[i] = Σ (x[j] − mean)²/(window − 1), j = i − window + 1 … i; NaN before the window is full. Causal. Sums are taken
 * about a value of the window itself and afresh once a window, so that neither an offset nor rounding piles up.
 *
 * @param values finite, uniform sampling
 * @param window samples, ≥ 2
 * @param out    overwritten; as long as values
 */
export function runningVarianceInto(values: Float64Array, window: number, out: Float64Array): void {
  let about = 0;
  let sum = 0;
  let square = 0;
  for (let i = 0; i < values.length; i++) {
    if (i < window - 1) {
      out[i] = Number.NaN;
      continue;
    }
    if ((i + 1) % window === 0) {
      about = values[i]!;
      sum = 0;
      square = 0;
      for (let j = i - window + 1; j <= i; j++) {
        const x = values[j]! - about;
        sum += x;
        square += x * x;
      }
    } else {
      const x = values[i]! - about;
      const gone = values[i - window]! - about;
      sum += x - gone;
      square += x * x - gone * gone;
    }
    out[i] = Math.max(0, square - (sum * sum) / window) / (window - 1);
  }
}

/**
 * Running lag-1 autocorrelation over the last `window` samples: Pearson's correlation of the window − 1 pairs of
 * neighbours in it. NaN before the window is full and where it is constant. Causal; sums as in `runningVarianceInto`.
 *
 * @param values finite, uniform sampling
 * @param window samples, ≥ 3
 * @param out    overwritten; as long as values
 */
export function runningAutocorrelationInto(values: Float64Array, window: number, out: Float64Array): void {
  const pairs = window - 1;
  let about = 0;
  let first = 0;
  let second = 0;
  let firstSquare = 0;
  let secondSquare = 0;
  let product = 0;
  for (let i = 0; i < values.length; i++) {
    if (i < window - 1) {
      out[i] = Number.NaN;
      continue;
    }
    const afresh = (i + 1) % window === 0;
    if (afresh) {
      about = values[i]!;
      first = second = firstSquare = secondSquare = product = 0;
    }
    for (let j = afresh ? i - window + 2 : i; j <= i; j++) {
      const x = values[j - 1]! - about;
      const y = values[j]! - about;
      first += x;
      second += y;
      firstSquare += x * x;
      secondSquare += y * y;
      product += x * y;
    }
    if (!afresh) {
      const x = values[i - window]! - about;
      const y = values[i - window + 1]! - about;
      first -= x;
      second -= y;
      firstSquare -= x * x;
      secondSquare -= y * y;
      product -= x * y;
    }
    const spreads = (firstSquare - (first * first) / pairs) * (secondSquare - (second * second) / pairs);
    // what rounding leaves of a constant stretch is no spread
    const constant = !(spreads > 1e-24 * firstSquare * secondSquare);
    const together = product - (first * second) / pairs;
    out[i] = constant ? Number.NaN : Math.max(-1, Math.min(1, together / Math.sqrt(spreads)));
  }
}
