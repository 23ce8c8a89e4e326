/** Bins a side of the histogram. */
const BINS = 64;
/** Lags looked at before giving up. */
const MOST_LAGS = 1000;
/** Pairs counted for a lag; a longer record is read at every second, third … sample. */
const MOST_PAIRS = 100_000;

/** The delay at the first minimum of the average mutual information, and how it was found, in words. */
export interface WindowChoice {
  delays: number;
  words: string;
}

/**
 * Average mutual information, in bits, between a signal and itself `lag` samples later, from a histogram of
 * bins × bins equal cells over the signal's range. Pairs never cross runs.
 *
 * @param runs one channel; finite
 * @param lag  samples, ≥ 1
 * @param step reads every step-th pair
 * @see Fraser and Swinney 1986, Physical Review A 33, 1134–1140
 */
export function averageMutualInformation(
  runs: readonly Float64Array[],
  lag: number,
  bins = BINS,
  step = 1,
): number {
  return informationOfCells(
    runs.map((run) => cellsOf(run, rangeOf(runs), bins)),
    lag,
    bins,
    step,
  );
}

/**
 * Delays for a signal: the window is the lag at the first minimum of its average mutual information, the first lag
 * that is lower than the one before and not higher than the one after. Without a minimum within the lags looked at,
 * the first lag with less than 1/e of the information at lag 1 is taken, or the last one.
 *
 * @param runs one channel; finite, not constant
 */
export function chooseDelays(runs: readonly Float64Array[], bins = BINS): WindowChoice {
  const longest = Math.max(...runs.map((run) => run.length));
  const samples = runs.reduce((sum, run) => sum + run.length, 0);
  const most = Math.max(2, Math.min(MOST_LAGS, Math.floor(longest / 10)));
  const step = Math.max(1, Math.floor(samples / MOST_PAIRS));
  const range = rangeOf(runs);
  const cells = runs.map((run) => cellsOf(run, range, bins));
  const information = [Number.POSITIVE_INFINITY];
  for (let lag = 1; lag <= most; lag++) {
    information.push(informationOfCells(cells, lag, bins, step));
    if (lag >= 3 && isMinimum(information, lag - 1)) return chosen(lag - 1, 'is the first minimum');
  }
  const level = information[1]! / Math.E;
  const fallen = information.findIndex((value) => value < level);
  return fallen > 0
    ? chosen(fallen, 'has no minimum; this is the first lag below 1/e of its value at lag 1')
    : chosen(most, `has no minimum within ${most} lags; this is the last one`);
}

function isMinimum(information: number[], lag: number): boolean {
  return information[lag]! < information[lag - 1]! && information[lag]! <= information[lag + 1]!;
}

/** A window of fewer than four delays holds no rank worth the name. */
const FEWEST_DELAYS = 4;

function chosen(lag: number, how: string): WindowChoice {
  const delays = Math.max(FEWEST_DELAYS, lag);
  const raised = delays > lag ? `, raised to ${delays} delays` : '';
  return {
    delays,
    words: `average mutual information (${BINS} bins, Fraser and Swinney 1986): lag ${lag} ${how}${raised}`,
  };
}

function rangeOf(runs: readonly Float64Array[]): { low: number; high: number } {
  let low = Number.POSITIVE_INFINITY;
  let high = Number.NEGATIVE_INFINITY;
  for (const run of runs) {
    for (const value of run) {
      if (value < low) low = value;
      if (value > high) high = value;
    }
  }
  return { low, high };
}

function cellsOf(run: Float64Array, { low, high }: { low: number; high: number }, bins: number): Uint16Array {
  const cells = new Uint16Array(run.length);
  const scale = bins / (high - low);
  for (let i = 0; i < run.length; i++) cells[i] = Math.min(bins - 1, Math.floor((run[i]! - low) * scale));
  return cells;
}

function informationOfCells(runs: readonly Uint16Array[], lag: number, bins: number, step: number): number {
  const joint = new Float64Array(bins * bins);
  let pairs = 0;
  for (const cells of runs) {
    for (let i = 0; i + lag < cells.length; i += step) {
      const cell = cells[i]! * bins + cells[i + lag]!;
      joint[cell] = joint[cell]! + 1;
      pairs++;
    }
  }
  const before = new Float64Array(bins);
  const after = new Float64Array(bins);
  for (let a = 0; a < bins; a++) {
    for (let b = 0; b < bins; b++) {
      before[a] = before[a]! + joint[a * bins + b]!;
      after[b] = after[b]! + joint[a * bins + b]!;
    }
  }
  let information = 0;
  for (let a = 0; a < bins; a++) {
    for (let b = 0; b < bins; b++) {
      const count = joint[a * bins + b]!;
      if (count > 0) information += count * Math.log2((count * pairs) / (before[a]! * after[b]!));
    }
  }
  return pairs > 0 ? information / pairs : 0;
}
