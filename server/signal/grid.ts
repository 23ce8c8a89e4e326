/** Samples this near to a grid time, as a share of the interval, count as on it. */
export const ON_GRID = 0.01;

/** How a grid value between two samples is made: on the straight line, or as the sample before (marks). */
export type Bridging = 'linear' | 'previous';

/** Remembers where the grid of one channel stands. Plain data: a snapshot is a copy of it. */
export interface GridState {
  interval: number;
  /** the longest time without a sample that is bridged, in intervals */
  gapIntervals: number;
  bridging: Bridging;
  /** time of grid step 0 of this run; NaN before the first sample */
  anchor: number;
  /** next grid step of this run */
  step: number;
  /** newest finite sample */
  lastTime: number;
  lastValue: number;
}

/** Grid steps that a push brought: the first `count` entries of each array. Reused from push to push. */
export interface GridBlock {
  count: number;
  /** grid time, seconds */
  time: Float64Array;
  /** time of the newest raw sample that the value needed, ≥ about `time` */
  newest: Float64Array;
  value: Float64Array;
  /** 1 where a run begins: after the first sample ever, or after a gap */
  starts: Uint8Array;
  /** gaps ended by this push: nothing came from `from` to `to`; `step` is the entry that begins the new run */
  gaps: { from: number; to: number; step: number }[];
}

export function createGrid(interval: number, gapIntervals: number, bridging: Bridging = 'linear'): GridState {
  return {
    interval,
    gapIntervals,
    bridging,
    anchor: Number.NaN,
    step: 0,
    lastTime: Number.NaN,
    lastValue: Number.NaN,
  };
}

export function createGridBlock(capacity = 64): GridBlock {
  return {
    count: 0,
    time: new Float64Array(capacity),
    newest: new Float64Array(capacity),
    value: new Float64Array(capacity),
    starts: new Uint8Array(capacity),
    gaps: [],
  };
}

/**
 * Puts samples on the grid. The grid is anchored at the first sample after a start or a gap; a sample within 1 % of
 * the interval of a grid time counts as on it, other grid values are bridged between the samples around them and
 * known only when the later one has come. NaN values are no samples; samples not newer than the last are passed over.
 * A longer stretch without samples than `gapIntervals` intervals ends the run.
 *
 * @param times  sample times in seconds, or null: sample i is at t0 + i·dt
 * @param values samples, any unit
 * @param block  overwritten with the steps that became known, in time order
 */
export function pushGrid(
  state: GridState,
  times: Float64Array | null,
  t0: number,
  dt: number,
  values: Float64Array,
  block: GridBlock,
): void {
  block.count = 0;
  if (block.gaps.length > 0) block.gaps = [];
  const gap = (state.gapIntervals + ON_GRID) * state.interval;
  for (let i = 0; i < values.length; i++) {
    const value = values[i]!;
    const time = times === null ? t0 + i * dt : times[i]!;
    if (!Number.isFinite(value) || time <= state.lastTime) continue;
    if (!(time - state.lastTime <= gap)) beginRun(state, time, value, block);
    else takeSteps(state, time, value, block);
    state.lastTime = time;
    state.lastValue = value;
  }
}

function beginRun(state: GridState, time: number, value: number, block: GridBlock): void {
  if (!Number.isNaN(state.lastTime)) block.gaps.push({ from: state.lastTime, to: time, step: block.count });
  state.anchor = time;
  state.step = 1;
  put(block, time, time, value, 1);
}

function takeSteps(state: GridState, time: number, value: number, block: GridBlock): void {
  const tolerance = ON_GRID * state.interval;
  for (;;) {
    const grid = state.anchor + state.step * state.interval;
    if (grid > time + tolerance) return;
    if (grid >= time - tolerance) put(block, grid, time, value, 0);
    else if (state.bridging === 'previous') put(block, grid, time, state.lastValue, 0);
    else {
      const share = (grid - state.lastTime) / (time - state.lastTime);
      put(block, grid, time, state.lastValue + share * (value - state.lastValue), 0);
    }
    state.step++;
  }
}

function put(block: GridBlock, time: number, newest: number, value: number, start: number): void {
  if (block.count === block.time.length) grow(block);
  block.time[block.count] = time;
  block.newest[block.count] = newest;
  block.value[block.count] = value;
  block.starts[block.count] = start;
  block.count++;
}

function grow(block: GridBlock): void {
  const capacity = block.time.length * 2;
  for (const key of ['time', 'newest', 'value'] as const) {
    const longer = new Float64Array(capacity);
    longer.set(block[key]);
    block[key] = longer;
  }
  const starts = new Uint8Array(capacity);
  starts.set(block.starts);
  block.starts = starts;
}

/** One run of uniformly spaced values: value i is at start + i·interval. */
export interface GridRun {
  start: number;
  values: Float64Array;
}

/**
 * Puts a whole recorded channel on a grid, cut into runs at long gaps: the same state machine as the live way.
 *
 * @param times  strictly increasing, seconds; same length as values
 * @param values NaN: no sample there
 */
export function gridRuns(
  times: Float64Array,
  values: Float64Array,
  interval: number,
  gapIntervals: number,
  bridging: Bridging = 'linear',
): GridRun[] {
  const block = createGridBlock(Math.max(64, values.length + 1));
  pushGrid(createGrid(interval, gapIntervals, bridging), times, 0, 0, values, block);
  return cutRuns(block);
}

/** Cuts a block of grid steps where runs begin; the values are copied. */
export function cutRuns(block: GridBlock): GridRun[] {
  const runs: GridRun[] = [];
  for (let begin = 0, i = 1; i <= block.count; i++) {
    if (i < block.count && block.starts[i] === 0) continue;
    runs.push({ start: block.time[begin]!, values: block.value.slice(begin, i) });
    begin = i;
  }
  return runs;
}

/**
 * The usual interval of recorded times: the mean of the differences within a tenth of their median (of the first
 * 10,000), as the shortest decimal that the scatter of the times and their own rounding allow: 0.1, not 0.0999999.
 *
 * @param times strictly increasing, seconds
 * @throws RangeError when there are fewer than two times
 */
export function usualInterval(times: Float64Array): number {
  if (times.length < 2) {
    throw new RangeError(`usualInterval: ${times.length} samples, needs at least 2; record for longer`);
  }
  const count = Math.min(times.length - 1, 10_000);
  const differences = new Float64Array(count);
  for (let i = 0; i < count; i++) differences[i] = times[i + 1]! - times[i]!;
  differences.sort();
  const median = differences[count >> 1]!;
  const usual = differences.filter((step) => Math.abs(step - median) <= 0.1 * median);
  const mean = usual.reduce((sum, step) => sum + (step - median), 0) / usual.length + median;
  const square = usual.reduce((sum, step) => sum + (step - mean) ** 2, 0);
  const rounding = 2 * Math.abs(times[count]!) * Number.EPSILON;
  const tolerance = (2 * Math.sqrt(square) + rounding) / usual.length;
  for (let digits = 1; digits < 15; digits++) {
    const short = Number(mean.toPrecision(digits));
    if (Math.abs(short - mean) <= tolerance) return short;
  }
  return mean;
}
