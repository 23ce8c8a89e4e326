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

/**
 * The stretches in which a channel lies on one side of a level: from the first such sample to just before the next one
 * that does not. Between samples, and where a value is missing, the last sample holds. Before the first value and
 * behind the last sample it is not known whether the condition holds, so those are left out as well.
 *
 * @param times  seconds, ascending; same length as values
 * @param values NaN: no sample there
 * @returns ascending, disjoint; the first may begin at −∞, the last ends at ∞
 */
export function conditionStretches(
  times: Float64Array,
  values: Float64Array,
  condition: LevelSide,
): LeftOut[] {
  const stretches: LeftOut[] = [];
  let from: number | null = Number.NEGATIVE_INFINITY;
  for (let i = 0; i < times.length; i++) {
    if (Number.isNaN(values[i]!)) continue;
    const out = liesOutside(condition, values[i]!);
    if (out) from ??= times[i]!;
    else if (from !== null) {
      stretches.push({ from, to: justBefore(times[i]!) });
      from = null;
    }
  }
  const last = times.length === 0 ? Number.NEGATIVE_INFINITY : justAfter(times[times.length - 1]!);
  stretches.push({ from: from ?? last, to: Number.POSITIVE_INFINITY });
  return stretches;
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
