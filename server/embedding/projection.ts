/**
 * The projection of delay windows on a few fixed vectors: the one kernel that the fit, the rehearsal and the live way
 * share, so that all three give the same bits.
 */
export interface Projection {
  channels: number;
  delays: number;
  rank: number;
  /** rank rows of channels × delays taps; the tap of the newest sample comes first within each channel */
  taps: Float64Array;
}

/**
 * Lays out projection coefficients for `projectInto`.
 *
 * @param coordinates (channels × delays) rows × rank columns, row-major, newest sample first (see Model.coordinates)
 * @throws RangeError when the length is not channels × delays × rank
 */
export function createProjection(
  coordinates: Float64Array,
  channels: number,
  delays: number,
  rank: number,
): Projection {
  const rows = channels * delays;
  if (coordinates.length !== rows * rank) {
    throw new RangeError(
      `createProjection: ${coordinates.length} coefficients, expected ${channels} channels × ${delays} delays × rank ${rank} = ` +
        `${rows * rank}; pass the model's own numbers`,
    );
  }
  const taps = new Float64Array(rank * rows);
  for (let row = 0; row < rows; row++) {
    for (let k = 0; k < rank; k++) taps[k * rows + row] = coordinates[row * rank + k]!;
  }
  return { channels, delays, rank, taps };
}

/**
 * Delay coordinates of `count` consecutive windows:
 * out[i·rank + k] = Σ_c Σ_j taps[k][c·delays + j] · lines[c][newest + i − j].
 *
 * Each output has one accumulator, summed over channels and then from the newest sample to the oldest, whatever the
 * count: any way of cutting a signal into calls gives the same bits. Four windows go through the inner loop together,
 * which is a matter of speed only.
 *
 * @param lines  one centred signal per channel, same indices in each
 * @param newest index of the newest sample of the first window, ≥ delays − 1
 * @param count  windows; newest + count ≤ length of each line
 * @param first  first coordinate wanted (0-based); coordinates before it are left as they are in `out`
 * @param out    count × rank, row-major, written in place
 */
export function projectInto(
  projection: Projection,
  lines: readonly Float64Array[],
  newest: number,
  count: number,
  out: Float64Array,
  first = 0,
): void {
  const { channels, delays, rank, taps } = projection;
  const rows = channels * delays;
  const tiled = count - (count % 4);
  for (let k = first; k < rank; k++) {
    for (let i = 0; i < tiled; i += 4) {
      let v0 = 0;
      let v1 = 0;
      let v2 = 0;
      let v3 = 0;
      for (let c = 0; c < channels; c++) {
        const line = lines[c]!;
        let at = newest + i;
        const end = k * rows + (c + 1) * delays;
        for (let t = end - delays; t < end; t++, at--) {
          const tap = taps[t]!;
          v0 += tap * line[at]!;
          v1 += tap * line[at + 1]!;
          v2 += tap * line[at + 2]!;
          v3 += tap * line[at + 3]!;
        }
      }
      out[i * rank + k] = v0;
      out[(i + 1) * rank + k] = v1;
      out[(i + 2) * rank + k] = v2;
      out[(i + 3) * rank + k] = v3;
    }
    for (let i = tiled; i < count; i++) {
      let v = 0;
      for (let c = 0; c < channels; c++) {
        const line = lines[c]!;
        let at = newest + i;
        const end = k * rows + (c + 1) * delays;
        for (let t = end - delays; t < end; t++, at--) v += taps[t]! * line[at]!;
      }
      out[i * rank + k] = v;
    }
  }
}
