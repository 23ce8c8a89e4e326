/** A stretch of channel time that must not count, ends included; seconds, infinite where it has no end. */
export interface LeftOut {
  from: number;
  to: number;
}

/**
 * The values with NaN wherever a stretch lies: what is left out is no sample, and the rules for gaps do the rest (the
 * window empties, the regime is not known, the span of a warning is unseen).
 *
 * @param times     seconds, ascending; same length as values
 * @param stretches in any order, overlapping or not
 * @returns a copy, or `values` itself where no sample is left out
 */
export function leaveOut(
  times: Float64Array,
  values: Float64Array,
  stretches: readonly LeftOut[],
): Float64Array {
  let kept = values;
  for (const { from, to } of stretches) {
    for (let i = firstFrom(times, from); i < times.length && times[i]! <= to; i++) {
      if (kept === values) kept = values.slice();
      kept[i] = Number.NaN;
    }
  }
  return kept;
}

/** Index of the first of ascending times that is ≥ `time`; their number when there is none. */
function firstFrom(times: Float64Array, time: number): number {
  let low = 0;
  let high = times.length;
  while (low < high) {
    const middle = (low + high) >> 1;
    if (times[middle]! < time) low = middle + 1;
    else high = middle;
  }
  return low;
}

/** On which side of a level a channel must lie for another one to be left out. */
export interface LevelSide {
  side: 'above' | 'below';
  level: number;
}

/** Whether a value lies strictly on the side that is left out. */
export const liesOutside = ({ side, level }: LevelSide, value: number): boolean =>
  side === 'above' ? value > level : value < level;

/** What is known so far of a condition on another channel; plain data. */
export interface ConditionState {
  /** time of the newest sample, −∞ before the first */
  newest: number;
  /** the stretches that are over, ascending, disjoint */
  over: LeftOut[];
  /** where the stretch begins that is not over; null: the condition does not hold */
  since: number | null;
}

/** Before the first value it is not known whether a condition holds, so everything is left out. */
export const createConditionState = (): ConditionState => ({
  newest: Number.NEGATIVE_INFINITY,
  over: [],
  since: Number.NEGATIVE_INFINITY,
});

/**
 * Takes samples of the channel that a condition reads. It holds from the first sample on its side of the level to just
 * before the next one that is not; between samples, and where a value is missing, the last sample holds. Samples not
 * newer than the newest are passed over.
 *
 * @param times  seconds, ascending; same length as values
 * @param values NaN: no sample there
 */
export function noteCondition(
  state: ConditionState,
  condition: LevelSide,
  times: Float64Array,
  values: Float64Array,
): void {
  for (let i = 0; i < times.length; i++) {
    const time = times[i]!;
    if (time <= state.newest) continue;
    state.newest = time;
    if (Number.isNaN(values[i]!)) continue;
    if (liesOutside(condition, values[i]!)) state.since ??= time;
    else if (state.since !== null) {
      state.over.push({ from: state.since, to: justBefore(time) });
      state.since = null;
    }
  }
}

/**
 * The stretches that a recorded channel's condition leaves out: `noteCondition` over all of it, and everything behind
 * the last sample, where it is not known.
 *
 * @param newest time of the channel's newest sample, where these are not all of them
 * @returns ascending, disjoint; the first may begin at −∞, the last ends at ∞
 */
export function conditionStretches(
  times: Float64Array,
  values: Float64Array,
  condition: LevelSide,
  newest = Number.NEGATIVE_INFINITY,
): LeftOut[] {
  const state = createConditionState();
  noteCondition(state, condition, times, values);
  const known = Math.max(newest, state.newest);
  const unknown = known === Number.NEGATIVE_INFINITY ? known : justAfter(known);
  return [...state.over, { from: state.since ?? unknown, to: Number.POSITIVE_INFINITY }];
}

const number = new Float64Array(1);
const bits = new BigInt64Array(number.buffer);

/** The next number up; `time` finite. */
export function justAfter(time: number): number {
  if (time === 0) return Number.MIN_VALUE;
  number[0] = time;
  bits[0]! += time > 0 ? 1n : -1n;
  return number[0];
}

/** The next number down; `time` finite. */
export const justBefore = (time: number): number => -justAfter(-time);
