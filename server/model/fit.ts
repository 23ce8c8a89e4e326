import type { Model } from '../../shared-types/model.ts';

/** What may be chosen for a fit; null: chosen from the data. */
export interface FitOptions {
  name: string;
  channels: { channel: string; unit: string }[];
  delays: number | null;
  rank: number | null;
  center: 'mean' | 'none';
  gapIntervals: number;
}

/**
 * Fits a model to uniformly sampled runs. STUB SIGNATURE, to be written by the fit engineer.
 *
 * @param runs     runs[i][c]: samples of channel c in run i, one every `interval` seconds; windows never cross runs
 */
export function fitModel(_runs: readonly (readonly Float64Array[])[], _interval: number, _options: FitOptions): Model {
  throw new Error('not written yet');
}
