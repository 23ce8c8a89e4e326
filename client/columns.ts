import type { Columns } from '../shared-types/channel.ts';

/** Points of one line for uPlot: `x` ascending seconds, `y` as long, null where the line is broken; never NaN. */
export interface Points {
  x: number[];
  y: (number | null)[];
}

/** Points of an empty line. */
export function createPoints(): Points {
  return { x: [], y: [] };
}

/**
 * Appends drawing columns to a line, in place: one point for a column of one value, two for a column with
 * extremes (the one nearer to the line's end first, so that the pen never crosses the column three times).
 * Columns that begin at or before the line's end take the place of what was there.
 *
 * @param points     the line, changed in place
 * @param columns    start times ascending (s), least and greatest values; NaN marks a gap
 * @param gapSeconds columns further apart than this are not joined; Infinity: always joined
 */
export function appendColumns(points: Points, columns: Columns, gapSeconds = Infinity): void {
  const { t, low, high } = columns;
  if (t.length > 0) dropFrom(points, t[0]!);
  let end = points.x.length > 0 ? points.x[points.x.length - 1]! : -Infinity;
  for (let i = 0; i < t.length; i++) {
    const start = t[i]!;
    if (!(start > end)) continue;
    if (start - end > gapSeconds) breakLine(points, end + (start - end) / 2);
    const width = i + 1 < t.length ? t[i + 1]! - start : i > 0 ? start - t[i - 1]! : 0;
    appendColumn(points, start, width, low[i]!, high[i]!);
    end = points.x[points.x.length - 1] ?? start;
  }
}

function appendColumn(points: Points, start: number, width: number, low: number, high: number): void {
  const { x, y } = points;
  if (!Number.isFinite(low) || !Number.isFinite(high)) {
    breakLine(points, start);
    return;
  }
  const before = y.length > 0 ? y[y.length - 1]! : null;
  const highFirst = before !== null && Math.abs(high - before) < Math.abs(low - before);
  x.push(start);
  y.push(highFirst ? high : low);
  if (low === high || !(width > 0)) {
    // a lone column has no width to spread its two extremes over: keep the further one
    if (low !== high) y[y.length - 1] = highFirst ? low : high;
    return;
  }
  x.push(start + width / 2);
  y.push(highFirst ? low : high);
}

function breakLine(points: Points, at: number): void {
  if (points.y.length === 0 || points.y[points.y.length - 1] === null) return;
  points.x.push(at);
  points.y.push(null);
}

/** Drops every point at or after a time, in place. */
export function dropFrom(points: Points, time: number): void {
  const { x, y } = points;
  let length = x.length;
  while (length > 0 && x[length - 1]! >= time) length--;
  x.length = length;
  y.length = length;
}

/**
 * Drops points before a time, in place, keeping one so that the line enters at the edge. Small leftovers stay
 * until there are enough of them to be worth moving the rest.
 */
export function trimBefore(points: Points, time: number, slack = 512): void {
  const surplus = indexAtOrAfter(points.x, time) - 1;
  if (surplus <= slack) return;
  points.x.splice(0, surplus);
  points.y.splice(0, surplus);
}

/** Index of the first entry of an ascending list that is at or after a time; the length if none is. */
export function indexAtOrAfter(x: ArrayLike<number>, time: number): number {
  let low = 0;
  let high = x.length;
  while (low < high) {
    const middle = (low + high) >> 1;
    if (x[middle]! < time) low = middle + 1;
    else high = middle;
  }
  return low;
}

/** The point nearest to a time, no further than `reach` seconds; null where there is none or the line is broken. */
export function nearest(points: Points, time: number, reach: number): { time: number; value: number } | null {
  const { x, y } = points;
  const after = indexAtOrAfter(x, time);
  const index =
    after > 0 && (after === x.length || time - x[after - 1]! <= x[after]! - time) ? after - 1 : after;
  if (index >= x.length || Math.abs(x[index]! - time) > reach) return null;
  const value = y[index];
  return value === null || value === undefined ? null : { time: x[index]!, value };
}

/** Columns as `GET …/columns` gives them, gaps as null. */
export interface FetchedColumns {
  t: number[];
  low: (number | null)[];
  high: (number | null)[];
}

/** A whole line from fetched columns. */
export function pointsOf(fetched: FetchedColumns, gapSeconds = Infinity): Points {
  const points = createPoints();
  const numbers = (list: (number | null)[]) => Float64Array.from(list, (value) => value ?? NaN);
  const columns = { t: Float64Array.from(fetched.t), low: numbers(fetched.low), high: numbers(fetched.high) };
  appendColumns(points, columns, gapSeconds);
  return points;
}
