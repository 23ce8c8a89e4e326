import type { Model, ValidityLimits } from '../../shared-types/model.ts';
import { fQuantile, normalQuantile } from '../signal/quantiles.ts';

/** Share of training windows, and of the laws the limits come from, that lies within a limit. */
const WITHIN = 0.999;
/** Share of a window's energy below which a residual is rounding, not misfit. */
const ROUNDING = 1e-13;

/** What is needed to tell how far a window lies from the model's subspace and from its usual place within it. */
export interface Validity {
  channels: number;
  delays: number;
  rank: number;
  /** 1/scale² of each channel: residuals are in squared units of the scaled channel */
  weights: Float64Array;
  /** mean square of the window along each singular vector, in the same units: residual = |window|² − Σ energy·v² */
  energies: Float64Array;
}

/** Takes out of a model what `validityInto` needs. */
export function createValidity(
  model: Pick<Model, 'channels' | 'delays' | 'rank' | 'singularValues'>,
  windows: number,
): Validity {
  const weights = Float64Array.from(model.channels, ({ scale }) => 1 / (scale * scale));
  // with one channel the Hankel matrix is left unscaled
  const unit = model.channels.length === 1 ? weights[0]! : 1;
  const energies = model.singularValues.map((s) => ((s * s) / windows) * unit);
  return { channels: model.channels.length, delays: model.delays, rank: model.rank, weights, energies };
}

/**
 * Squared residual outside the subspace (SPE) and Hotelling's T² of `count` consecutive windows:
 * SPE = Σ_c w_c Σ_j line_c[n − j]² − Σ_k energy_k·v_k², T² = Σ_k v_k² (the coordinates are uncorrelated, of unit rms).
 *
 * Every window is summed by itself, over channels and then from the newest sample to the oldest: any way of cutting a
 * signal into calls gives the same bits.
 *
 * @param lines       one centred signal per channel, as for `projectInto`
 * @param newest      index of the newest sample of the first window, ≥ delays − 1
 * @param coordinates count × rank, row-major, of the same windows
 * @param spe         count, overwritten; not below zero
 * @param t2          count, overwritten
 * @see Jackson and Mudholkar 1979, Technometrics 21, 341–349
 */
export function validityInto(
  validity: Validity,
  lines: readonly Float64Array[],
  newest: number,
  count: number,
  coordinates: Float64Array,
  spe: Float64Array,
  t2: Float64Array,
): void {
  const { channels, delays, rank, weights, energies } = validity;
  for (let i = 0; i < count; i++) {
    let residual = 0;
    for (let c = 0; c < channels; c++) {
      const line = lines[c]!;
      let square = 0;
      for (let at = newest + i; at > newest + i - delays; at--) square += line[at]! * line[at]!;
      residual += weights[c]! * square;
    }
    let distance = 0;
    for (let k = 0; k < rank; k++) {
      const v = coordinates[i * rank + k]!;
      distance += v * v;
      residual -= energies[k]! * v * v;
    }
    spe[i] = Math.max(0, residual);
    t2[i] = distance;
  }
}

/**
 * Limit of the squared residual, from the variances along the directions left out:
 * θ_k = Σ λ^k, h₀ = 1 − 2θ₁θ₃/(3θ₂²), Q = θ₁·(c·√(2θ₂h₀²)/θ₁ + 1 + θ₂h₀(h₀ − 1)/θ₁²)^{1/h₀}.
 *
 * @param left   variances λ along the directions outside the subspace
 * @param within share of windows within the limit, were they independent and normal
 * @returns 0 when nothing is left out, NaN where the approximation has no value
 * @see Jackson and Mudholkar 1979, Technometrics 21, 341–349
 */
export function residualLimit(left: Float64Array, within: number): number {
  const theta1 = left.reduce((sum, variance) => sum + variance, 0);
  const theta2 = left.reduce((sum, variance) => sum + variance ** 2, 0);
  const theta3 = left.reduce((sum, variance) => sum + variance ** 3, 0);
  if (theta2 === 0) return 0;
  const h = 1 - (2 * theta1 * theta3) / (3 * theta2 * theta2);
  const c = normalQuantile(within) * Math.sign(h);
  const base = (c * Math.sqrt(2 * theta2 * h * h)) / theta1 + 1 + (theta2 * h * (h - 1)) / (theta1 * theta1);
  return theta1 * base ** (1 / h);
}

/**
 * Limit of Hotelling's T² of a new observation: p(m + 1)(m − 1)/(m² − mp) · F(p, m − p).
 *
 * @param rank    p
 * @param windows m, > p
 * @see Tracy, Young and Mason 1992, Journal of Quality Technology 24, 88–95
 */
export function distanceLimit(rank: number, windows: number, within: number): number {
  const factor = (rank * (windows + 1) * (windows - 1)) / (windows * windows - windows * rank);
  return factor * fQuantile(within, rank, windows - rank);
}

/**
 * Limits of a model. The published limits hold for independent, normal windows; those of a recording overlap and are
 * neither, so each limit is the larger of the published one at 99.9 % and the 99.9 % quantile of the training windows.
 *
 * @param left variances outside the subspace, in squared units of the scaled channel
 * @param spe  of training windows (a sample of them will do), same length as t2
 * @param windows all training windows
 */
export function validityLimits(
  left: Float64Array,
  validity: Validity,
  windows: number,
  spe: Float64Array,
  t2: Float64Array,
): ValidityLimits {
  const rounding = ROUNDING * validity.channels * validity.delays;
  const published = residualLimit(left, WITHIN);
  const limits = {
    spe: Math.max(Number.isFinite(published) ? published : 0, quantile(spe, WITHIN), rounding),
    t2: Math.max(
      distanceLimit(validity.rank, Math.max(windows, validity.rank + 2), WITHIN),
      quantile(t2, WITHIN),
    ),
  };
  let beyond = 0;
  for (let i = 0; i < spe.length; i++) if (spe[i]! > limits.spe || t2[i]! > limits.t2) beyond++;
  return { ...limits, beyond: beyond / spe.length };
}

function quantile(values: Float64Array, share: number): number {
  const sorted = Float64Array.from(values).sort();
  return sorted[Math.min(sorted.length - 1, Math.floor(share * sorted.length))]!;
}
