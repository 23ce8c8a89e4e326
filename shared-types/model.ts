import type { VerdictKind } from './rehearsal.ts';
import type { Score } from './score.ts';
import type { RegimeRule, WatchRule } from './watch.ts';

/** A fitted model, in memory. Every matrix is row-major. */
export interface Model {
  name: string;
  /** seconds between grid steps */
  interval: number;
  /** delays a channel; the window is delays × interval */
  delays: number;
  rank: number;
  /** in order; `mean` is taken off a value before projection; `scale` (the sd) is already inside `coordinates` */
  channels: { channel: string; unit: string; mean: number; scale: number }[];
  center: 'mean' | 'none';
  /**
   * Projection, (channels × delays) rows × rank columns, newest sample of the first channel first:
   * v[k] = Σ_c Σ_j coordinates[(c·delays + j)·rank + k] · (x_c[n − j] − mean_c), each v[k] of unit rms over the training windows.
   */
  coordinates: Float64Array;
  /** of the centred (and, for several channels, scaled) Hankel matrix, `rank` of them, descending */
  singularValues: Float64Array;
  /** all computed singular values, for the picture with the noise floor */
  spectrum: Float64Array;
  /** dv/dt = A v + B v_r for v_1 … v_{r−1}; (rank−1)², rank−1; units 1/s */
  A: Float64Array;
  B: Float64Array;
  diagnostics: Diagnostics;
  /** the longest time without a sample that is bridged, in intervals */
  gapIntervals: number;
  rule: WatchRule | null;
  regime: RegimeRule | null;
  /** channel the regime rule reads; null: the first channel of the model */
  regimeChannel: string | null;
  switchWord: string;
  validity: ValidityLimits | null;
  score: Score | null;
  /** of the rehearsal that chose it; absent where it was not rehearsed, and in older files */
  verdict?: { kind: VerdictKind; than: string | null };
  /** what other thresholds would have done on the judged part, in ascending strictness; absent in older files */
  operating?: OperatingPoint[];
  provenance: Provenance;
}

/** A threshold with its re-arm level and what it did in a rehearsal; null where nothing was counted. */
export interface OperatingPoint {
  threshold: number;
  rearm: number;
  falsePerHour: number | null;
  detection: number | null;
  cameTrue: number | null;
}

export interface Diagnostics {
  /** R² of each row of the regression */
  r2: Float64Array;
  /** excess kurtosis, share of time beyond 2, and how often it was where; `counts` is absent in older files */
  forcing: { kurtosis: number; share: number; counts?: ForcingCounts };
  /** ‖A + Aᵀ‖_F / ‖A‖_F */
  antisymmetryDefect: number;
  eigenvalues: { re: number; im: number }[];
  /** on the held-out tail of the recording: one-step R² of each row; free run: correlation after one window; null when too short */
  heldOut: { oneStepR2: Float64Array; freeRunCorrelation: number } | null;
  /** how the singular vectors were found, and how deep that reaches */
  method: 'lagged products (double-double)' | 'orthogonal (QR)';
  rankChoice: string;
  windowChoice: string;
  samples: number;
  windows: number;
  seconds: number;
}

/** Windows counted by their forcing (standard deviations): bin i from `from` + i·`width`; the outer bins hold all beyond. */
export interface ForcingCounts {
  from: number;
  width: number;
  counts: number[];
}

/** Limits beyond which a window does not look like the training data. */
export interface ValidityLimits {
  /** squared residual outside the subspace, in squared units of the scaled channel: Jackson–Mudholkar limit */
  spe: number;
  /** Hotelling's T² of the delay coordinates */
  t2: number;
  /** share of training windows beyond either limit */
  beyond: number;
}

export interface Provenance {
  recordings: { name: string; sha256: string; from: number; to: number; samples: number }[];
  program: string;
  /** RFC 3339 */
  fittedAt: string;
}

/** What `GET /api/models` lists. */
export interface ModelSummary {
  name: string;
  interval: number;
  delays: number;
  rank: number;
  channels: string[];
  rule: WatchRule | null;
  regime: RegimeRule | null;
  score: Score | null;
  fittedAt: string;
  usedBy: string[];
}

/** What a person judges a model by, as `GET /api/models/NAME/evidence` gives it: plain numbers, matrices as rows. */
export interface ModelEvidence
  extends Omit<
    Model,
    'coordinates' | 'singularValues' | 'spectrum' | 'A' | 'B' | 'diagnostics' | 'operating' | 'validity'
  > {
  /** of all singular values, and the floor of Gavish and Donoho below which they are taken for noise */
  spectrum: number[];
  noiseFloor: number;
  A: number[][];
  B: number[];
  diagnostics: Omit<Diagnostics, 'r2' | 'heldOut'> & {
    r2: number[];
    heldOut: { oneStepR2: number[]; freeRunCorrelation: number } | null;
  };
  validity: ValidityLimits | null;
  operating: OperatingPoint[];
  usedBy: string[];
}

/** Version written by this program; older files are read and brought forward, newer ones refused. */
export const MODEL_FILE_VERSION = 1;
