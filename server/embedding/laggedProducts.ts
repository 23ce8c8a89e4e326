import { addAt, addProductAt, createDoubleDoubles, type DoubleDoubles, splitHigh } from './doubleDouble.ts';
import { lineInto, type Runs } from './runs.ts';

/** Windows taken together: their samples, parted in halves, stay in the cache. */
const BLOCK = 2048;

/** A stretch of one channel's line, each sample parted into two halves of 26 bits (line = high + low). */
interface SplitLine {
  line: Float64Array;
  high: Float64Array;
  low: Float64Array;
}

/**
 * Gram matrix H·Hᵀ of the stacked Hankel matrix, in double-double, without forming H (rows q = channels × delays):
 * G[(a·delays + i), (b·delays + j)] = Σ_windows line_a[n − i] · line_b[n − j].
 *
 * Only first rows and columns of each pair of channels take full sums; the others follow from
 * G[i+1][j+1] = G[i][j] + what enters at the start of each run − what leaves at its end. Memory: q² pairs and one
 * block. The sums are the compensated dot product of Ogita, Rump and Oishi 2005, SIAM J. Sci. Comput. 26, 1955–1988.
 *
 * @param runs runs shorter than `delays` are passed over
 * @returns q × q, row-major, symmetric
 */
export function laggedProducts(runs: Runs, delays: number): DoubleDoubles {
  const channels = runs.means.length;
  const rows = channels * delays;
  const gram = createDoubleDoubles(rows * rows);
  const lines = Array.from({ length: channels }, () => createSplitLine(BLOCK + delays - 1));
  for (const run of runs.samples) {
    const length = run[0]!.length;
    if (length < delays) continue;
    for (let newest = delays - 1; newest < length; newest += BLOCK) {
      const count = Math.min(BLOCK, length - newest);
      for (let c = 0; c < channels; c++) {
        splitInto(run[c]!, newest - delays + 1, count + delays - 1, runs, c, lines[c]!);
      }
      addFirstRows(gram, lines, delays, count);
    }
    addEnds(gram, run, runs, delays);
  }
  for (let a = 0; a < channels; a++) {
    for (let b = a; b < channels; b++) followDiagonals(gram, rows, a * delays, b * delays, delays);
  }
  mirror(gram, rows);
  return gram;
}

function createSplitLine(length: number): SplitLine {
  return { line: new Float64Array(length), high: new Float64Array(length), low: new Float64Array(length) };
}

function splitInto(
  values: Float64Array,
  from: number,
  count: number,
  runs: Runs,
  channel: number,
  out: SplitLine,
): void {
  const { line, high, low } = out;
  lineInto(values, from, count, runs.means[channel]!, runs.weights[channel]!, line);
  for (let i = 0; i < count; i++) {
    const x = line[i]!;
    const h = splitHigh(x);
    high[i] = h;
    low[i] = x - h;
  }
}

function addFirstRows(gram: DoubleDoubles, lines: SplitLine[], delays: number, count: number): void {
  const rows = lines.length * delays;
  for (let a = 0; a < lines.length; a++) {
    for (let b = a; b < lines.length; b++) {
      addLaggedDots(gram, a * delays * rows + b * delays, 1, lines[a]!, lines[b]!, delays, count, 0);
      if (b > a)
        addLaggedDots(gram, a * delays * rows + b * delays, rows, lines[b]!, lines[a]!, delays, count, 1);
    }
  }
}

/**
 * gram[at + lag·step] += Σ_{i < count} a[delays − 1 + i] · b[delays − 1 + i − lag] for lag = first … delays − 1.
 * Two lags go through the loop together, which is a matter of speed only.
 */
function addLaggedDots(
  gram: DoubleDoubles,
  at: number,
  step: number,
  a: SplitLine,
  b: SplitLine,
  delays: number,
  count: number,
  first: number,
): void {
  const { line: x, high: xHigh, low: xLow } = a;
  const { line: y, high: yHigh, low: yLow } = b;
  const newest = delays - 1;
  for (let lag = first; lag < delays; lag += 2) {
    // an odd lag left over is summed twice and added once
    const other = lag + 1 < delays ? lag + 1 : lag;
    let sum0 = 0;
    let sum1 = 0;
    let lost0 = 0;
    let lost1 = 0;
    for (let i = newest; i < newest + count; i++) {
      const p = x[i]!;
      const pHigh = xHigh[i]!;
      const pLow = xLow[i]!;

      const high0 = yHigh[i - lag]!;
      const low0 = yLow[i - lag]!;
      const product0 = p * y[i - lag]!;
      const total0 = sum0 + product0;
      const part0 = total0 - sum0;
      lost0 +=
        sum0 -
        (total0 - part0) +
        (product0 - part0) +
        (pHigh * high0 - product0 + pHigh * low0 + pLow * high0 + pLow * low0);
      sum0 = total0;

      const high1 = yHigh[i - other]!;
      const low1 = yLow[i - other]!;
      const product1 = p * y[i - other]!;
      const total1 = sum1 + product1;
      const part1 = total1 - sum1;
      lost1 +=
        sum1 -
        (total1 - part1) +
        (product1 - part1) +
        (pHigh * high1 - product1 + pHigh * low1 + pLow * high1 + pLow * low1);
      sum1 = total1;
    }
    addAt(gram, at + lag * step, sum0, lost0);
    if (other > lag) addAt(gram, at + other * step, sum1, lost1);
  }
}

/** Leaves in gram[i+1][j+1] what this run adds to the step from [i][j] to [i+1][j+1]. */
function addEnds(gram: DoubleDoubles, run: readonly Float64Array[], runs: Runs, delays: number): void {
  const rows = run.length * delays;
  const length = run[0]!.length;
  const heads = run.map(() => new Float64Array(delays));
  const tails = run.map(() => new Float64Array(delays));
  run.forEach((values, c) => {
    lineInto(values, 0, delays, runs.means[c]!, runs.weights[c]!, heads[c]!);
    lineInto(values, length - delays, delays, runs.means[c]!, runs.weights[c]!, tails[c]!);
  });
  for (let a = 0; a < run.length; a++) {
    for (let b = a; b < run.length; b++) {
      for (let i = 0; i < delays - 1; i++) {
        for (let j = a === b ? i : 0; j < delays - 1; j++) {
          const at = (a * delays + i + 1) * rows + b * delays + j + 1;
          addProductAt(gram, at, heads[a]![delays - 2 - i]!, heads[b]![delays - 2 - j]!);
          addProductAt(gram, at, -tails[a]![delays - 1 - i]!, tails[b]![delays - 1 - j]!);
        }
      }
    }
  }
}

function followDiagonals(gram: DoubleDoubles, rows: number, top: number, left: number, delays: number): void {
  for (let i = 0; i < delays - 1; i++) {
    for (let j = top === left ? i : 0; j < delays - 1; j++) {
      const from = (top + i) * rows + left + j;
      addAt(gram, from + rows + 1, gram.high[from]!, gram.low[from]!);
    }
  }
}

function mirror(gram: DoubleDoubles, rows: number): void {
  for (let i = 0; i < rows; i++) {
    for (let j = 0; j < i; j++) {
      gram.high[i * rows + j] = gram.high[j * rows + i]!;
      gram.low[i * rows + j] = gram.low[j * rows + i]!;
    }
  }
}
