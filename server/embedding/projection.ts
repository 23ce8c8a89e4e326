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
 * four taps at a time, each sample read once for all four: a matter of speed only.
 *
 * @param lines  one centred signal per channel, same indices in each
 * @param newest index of the newest sample of the first window, ≥ delays − 1
 * @param count  windows; newest + count ≤ length of each line
 * @param out    count × rank, row-major, written in place
 * @param wanted first coordinate wanted (0-based); those before it are left as they are in `out`
 */
export function projectInto(
  projection: Projection,
  lines: readonly Float64Array[],
  newest: number,
  count: number,
  out: Float64Array,
  wanted = 0,
): void {
  const tiled = count - (count % 4);
  if (tiled > 0) projectTilesInto(projection, lines, newest, tiled, out, wanted);
  const { channels, delays, rank, taps } = projection;
  for (let i = tiled; i < count; i++) {
    for (let k = wanted; k < rank; k++) {
      let v = 0;
      for (let c = 0; c < channels; c++) {
        const line = lines[c]!;
        const first = (k * channels + c) * delays;
        for (let j = 0; j < delays; j++) v += taps[first + j]! * line[newest + i - j]!;
      }
      out[i * rank + k] = v;
    }
  }
}

/** As `projectInto`, for a count that is a multiple of four. */
function projectTilesInto(
  { channels, delays, rank, taps }: Projection,
  lines: readonly Float64Array[],
  newest: number,
  count: number,
  out: Float64Array,
  wanted: number,
): void {
  for (let k = wanted; k < rank; k++) {
    for (let i = 0; i < count; i += 4) {
      const at = newest + i;
      let v0 = 0;
      let v1 = 0;
      let v2 = 0;
      let v3 = 0;
      for (let c = 0; c < channels; c++) {
        const line = lines[c]!;
        const first = (k * channels + c) * delays;
        // x1, x2, x3: the samples that the second, third and fourth window meet at this tap
        let x1 = line[at + 1]!;
        let x2 = line[at + 2]!;
        let x3 = line[at + 3]!;
        let j = 0;
        for (; j + 4 <= delays; j += 4) {
          const a = taps[first + j]!;
          const y0 = line[at - j]!;
          v0 += a * y0;
          v1 += a * x1;
          v2 += a * x2;
          v3 += a * x3;
          const b = taps[first + j + 1]!;
          const y1 = line[at - j - 1]!;
          v0 += b * y1;
          v1 += b * y0;
          v2 += b * x1;
          v3 += b * x2;
          const d = taps[first + j + 2]!;
          const y2 = line[at - j - 2]!;
          v0 += d * y2;
          v1 += d * y1;
          v2 += d * y0;
          v3 += d * x1;
          const e = taps[first + j + 3]!;
          const y3 = line[at - j - 3]!;
          v0 += e * y3;
          v1 += e * y2;
          v2 += e * y1;
          v3 += e * y0;
          x1 = y3;
          x2 = y2;
          x3 = y1;
        }
        for (; j < delays; j++) {
          const tap = taps[first + j]!;
          const x0 = line[at - j]!;
          v0 += tap * x0;
          v1 += tap * x1;
          v2 += tap * x2;
          v3 += tap * x3;
          x3 = x2;
          x2 = x1;
          x1 = x0;
        }
      }
      out[i * rank + k] = v0;
      out[(i + 1) * rank + k] = v1;
      out[(i + 2) * rank + k] = v2;
      out[(i + 3) * rank + k] = v3;
    }
  }
}
