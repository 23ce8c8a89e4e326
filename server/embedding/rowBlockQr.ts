import { lineInto, type Runs } from './runs.ts';

/** Windows reduced at a time; a block of them stays in the cache. */
const BLOCK = 1024;

/**
 * Triangular factor R (q × q, q = channels × delays) of the transposed Hankel matrix, Hᵀ = Q·R, by Householder
 * reflections: each block of windows is reduced to a triangle, triangles are merged in pairs like the carries of a
 * binary counter, so that an entry is rounded log₂(blocks) times and not once for every block. Neither H nor Q is
 * formed; memory is one block and log₂(blocks) triangles.
 *
 * @param runs runs shorter than `delays` are passed over
 * @returns q × q, row-major, upper triangular
 * @see Golub and Van Loan 2013, Matrix Computations, 4th ed., section 5.2
 * @see Demmel, Grigori, Hoemmen and Langou 2012, SIAM J. Sci. Comput. 34, A206–A239 (reduction by a tree)
 */
export function rowBlockQr(runs: Runs, delays: number): Float64Array {
  const channels = runs.means.length;
  const rows = channels * delays;
  const height = Math.max(BLOCK, rows);
  const block = new Float64Array(rows * height);
  const line = new Float64Array(height + delays - 1);
  const carries: (Float64Array | null)[] = [];
  for (const run of runs.samples) {
    const length = run[0]!.length;
    for (let newest = delays - 1; newest < length; newest += height) {
      const count = Math.min(height, length - newest);
      for (let c = 0; c < channels; c++) {
        lineInto(run[c]!, newest - delays + 1, count + delays - 1, runs.means[c]!, runs.weights[c]!, line);
        for (let j = 0; j < delays; j++) {
          block.set(line.subarray(delays - 1 - j, delays - 1 - j + count), (c * delays + j) * height);
        }
      }
      const triangle = new Float64Array(rows * rows);
      foldInto(triangle, rows, block, height, count);
      carry(carries, triangle, rows, block, height);
    }
  }
  return carries.reduce<Float64Array>(
    (total, triangle) => (triangle === null ? total : merge(total, triangle, rows, block, height)),
    new Float64Array(rows * rows),
  );
}

function carry(
  carries: (Float64Array | null)[],
  triangle: Float64Array,
  rows: number,
  block: Float64Array,
  height: number,
): void {
  let level = 0;
  for (; carries[level]; level++) {
    merge(triangle, carries[level]!, rows, block, height);
    carries[level] = null;
  }
  carries[level] = triangle;
}

/** R of [into; from], written over `into`, which is returned. */
function merge(
  into: Float64Array,
  from: Float64Array,
  rows: number,
  block: Float64Array,
  height: number,
): Float64Array {
  for (let j = 0; j < rows; j++) {
    for (let i = 0; i < rows; i++) block[j * height + i] = from[i * rows + j]!;
  }
  foldInto(into, rows, block, height, rows);
  return into;
}

/** R of [triangle; block], in place. Column j of the block is block[j·height … + count]; the block is destroyed. */
function foldInto(
  triangle: Float64Array,
  rows: number,
  block: Float64Array,
  height: number,
  count: number,
): void {
  for (let k = 0; k < rows; k++) {
    const column = k * height;
    const end = column + count;
    let square = 0;
    for (let i = column; i < end; i++) square += block[i]! * block[i]!;
    if (square === 0) continue;
    const head = triangle[k * rows + k]!;
    const norm = Math.sqrt(head * head + square);
    const alpha = head > 0 ? -norm : norm;
    const first = head - alpha;
    const beta = 2 / (first * first + square);
    triangle[k * rows + k] = alpha;
    let j = k + 1;
    for (; j + 3 < rows; j += 4) {
      reflectFour(triangle, k * rows + j, block, column, end, (j - k) * height, height, first, beta);
    }
    for (; j < rows; j++) {
      reflectOne(triangle, k * rows + j, block, column, end, (j - k) * height, first, beta);
    }
  }
}

/** Reflects four neighbouring columns; sharing the loads of the reflector is a matter of speed only. */
function reflectFour(
  triangle: Float64Array,
  at: number,
  block: Float64Array,
  column: number,
  end: number,
  offset: number,
  height: number,
  first: number,
  beta: number,
): void {
  const offset1 = offset + height;
  const offset2 = offset1 + height;
  const offset3 = offset2 + height;
  let dot0 = first * triangle[at]!;
  let dot1 = first * triangle[at + 1]!;
  let dot2 = first * triangle[at + 2]!;
  let dot3 = first * triangle[at + 3]!;
  for (let i = column; i < end; i++) {
    const v = block[i]!;
    dot0 += v * block[i + offset]!;
    dot1 += v * block[i + offset1]!;
    dot2 += v * block[i + offset2]!;
    dot3 += v * block[i + offset3]!;
  }
  dot0 *= beta;
  dot1 *= beta;
  dot2 *= beta;
  dot3 *= beta;
  triangle[at] = triangle[at]! - dot0 * first;
  triangle[at + 1] = triangle[at + 1]! - dot1 * first;
  triangle[at + 2] = triangle[at + 2]! - dot2 * first;
  triangle[at + 3] = triangle[at + 3]! - dot3 * first;
  for (let i = column; i < end; i++) {
    const v = block[i]!;
    block[i + offset] = block[i + offset]! - dot0 * v;
    block[i + offset1] = block[i + offset1]! - dot1 * v;
    block[i + offset2] = block[i + offset2]! - dot2 * v;
    block[i + offset3] = block[i + offset3]! - dot3 * v;
  }
}

function reflectOne(
  triangle: Float64Array,
  at: number,
  block: Float64Array,
  column: number,
  end: number,
  offset: number,
  first: number,
  beta: number,
): void {
  let dot = first * triangle[at]!;
  for (let i = column; i < end; i++) dot += block[i]! * block[i + offset]!;
  const share = beta * dot;
  triangle[at] = triangle[at]! - share * first;
  for (let i = column; i < end; i++) block[i + offset] = block[i + offset]! - share * block[i]!;
}
