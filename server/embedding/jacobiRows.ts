/** Sweeps after which rotation stops; graded factors need 4 to 8. */
const MOST_SWEEPS = 40;

/**
 * Singular values and right singular vectors of a matrix with few rows, by rotating its rows until they are mutually
 * orthogonal (one-sided Jacobi). On the factor of a pivoted Cholesky or on a triangle whose rows fall in size, small
 * singular values keep their relative accuracy, which a bidiagonalisation does not promise.
 *
 * @param matrix rows × columns, row-major; overwritten: its rows become singular value times right singular vector
 * @param rows   ≤ columns
 * @returns row numbers in order of falling singular values, and those values
 * @see Hestenes 1958, J. SIAM 6, 51–90; Demmel and Veselić 1992, SIAM J. Matrix Anal. Appl. 13, 1204–1245
 */
export function orthogonaliseRows(
  matrix: Float64Array,
  rows: number,
  columns: number,
): { order: number[]; singularValues: Float64Array } {
  const negligible = Number.EPSILON * Math.sqrt(columns);
  for (let sweep = 0; sweep < MOST_SWEEPS; sweep++) {
    let rotated = false;
    for (let p = 0; p < rows - 1; p++) {
      for (let q = p + 1; q < rows; q++) {
        if (rotatePair(matrix, p * columns, q * columns, columns, negligible)) rotated = true;
      }
    }
    if (!rotated) break;
  }
  const norms = Float64Array.from({ length: rows }, (_, p) =>
    Math.sqrt(dot(matrix, p * columns, p * columns, columns)),
  );
  const order = Array.from(norms.keys()).sort((a, b) => norms[b]! - norms[a]!);
  return { order, singularValues: Float64Array.from(order, (p) => norms[p]!) };
}

function dot(matrix: Float64Array, p: number, q: number, columns: number): number {
  let sum = 0;
  for (let i = 0; i < columns; i++) sum += matrix[p + i]! * matrix[q + i]!;
  return sum;
}

/** Rotates two rows to be orthogonal; false when they already are. */
function rotatePair(
  matrix: Float64Array,
  p: number,
  q: number,
  columns: number,
  negligible: number,
): boolean {
  let pp = 0;
  let qq = 0;
  let pq = 0;
  for (let i = 0; i < columns; i++) {
    const a = matrix[p + i]!;
    const b = matrix[q + i]!;
    pp += a * a;
    qq += b * b;
    pq += a * b;
  }
  if (!(Math.abs(pq) > negligible * Math.sqrt(pp) * Math.sqrt(qq))) return false;
  const zeta = (qq - pp) / (2 * pq);
  const tangent = Math.sign(zeta || 1) / (Math.abs(zeta) + Math.sqrt(1 + zeta * zeta));
  const cosine = 1 / Math.sqrt(1 + tangent * tangent);
  const sine = cosine * tangent;
  for (let i = 0; i < columns; i++) {
    const a = matrix[p + i]!;
    const b = matrix[q + i]!;
    matrix[p + i] = cosine * a - sine * b;
    matrix[q + i] = sine * a + cosine * b;
  }
  return true;
}
