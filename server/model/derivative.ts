/** Rows that the stencil needs before and after the one it differentiates. */
export const STENCIL = 2;

/**
 * Fourth-order central difference of every column:
 * out[i] = (v[i] − 8·v[i+1] + 8·v[i+3] − v[i+4]) / (12·interval), which belongs to row i + 2 of v.
 *
 * @param v    rows × columns, row-major, consecutive in time
 * @param rows ≥ 5
 * @param out  (rows − 4) × columns, overwritten; in units of v per second
 * @see Fornberg 1988, Mathematics of Computation 51, 699–706, Table 1
 */
export function derivativeInto(
  v: Float64Array,
  rows: number,
  columns: number,
  interval: number,
  out: Float64Array,
): void {
  const scale = 1 / (12 * interval);
  const count = (rows - 2 * STENCIL) * columns;
  for (let i = 0; i < count; i++) {
    const near = v[i + 3 * columns]! - v[i + columns]!;
    const far = v[i + 4 * columns]! - v[i]!;
    out[i] = (8 * near - far) * scale;
  }
}
