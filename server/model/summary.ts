import type { Model } from '../../shared-types/model.ts';

/**
 * What `fit --json` prints: plain numbers, matrices as arrays of rows. `coordinates` has one row a delay, the newest
 * sample first (all delays of the first channel, then those of the next); `mean` is one number, or one a channel.
 */
export function summarise(model: Model): { [key: string]: unknown } {
  const { diagnostics, rank } = model;
  const means = model.channels.map(({ mean }) => mean);
  return {
    name: model.name,
    interval: model.interval,
    delays: model.delays,
    window: model.delays * model.interval,
    rank,
    samples: diagnostics.samples,
    windows: diagnostics.windows,
    channels: model.channels,
    center: model.center,
    mean: means.length === 1 ? means[0] : means,
    singularValues: [...model.singularValues],
    spectrum: [...model.spectrum],
    coordinates: rowsOf(model.coordinates, rank),
    A: rowsOf(model.A, rank - 1),
    B: [...model.B],
    forcing: diagnostics.forcing,
    r2: [...diagnostics.r2],
    antisymmetryDefect: diagnostics.antisymmetryDefect,
    eigenvalues: diagnostics.eigenvalues,
    heldOut: diagnostics.heldOut && { ...diagnostics.heldOut, oneStepR2: [...diagnostics.heldOut.oneStepR2] },
    method: diagnostics.method,
    rankChoice: diagnostics.rankChoice,
    windowChoice: diagnostics.windowChoice,
    validity: model.validity,
    rule: model.rule,
    regime: model.regime,
    regimeChannel: model.regimeChannel,
    score: model.score,
    provenance: model.provenance,
    seconds: diagnostics.seconds,
  };
}

/** A row-major matrix as an array of rows. */
export function rowsOf(matrix: Float64Array, columns: number): number[][] {
  return Array.from({ length: matrix.length / columns }, (_, row) => [
    ...matrix.subarray(row * columns, (row + 1) * columns),
  ]);
}
