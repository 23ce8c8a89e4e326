import type { SwitchCard } from '../../shared-types/rehearsal.ts';
import { timeStep } from '../strip/ticks.ts';

/** A linear scale: `low` lands on pixel `from`, `high` on pixel `to`. */
export interface Scale {
  low: number;
  high: number;
  from: number;
  to: number;
}

/** Where a value lands, in pixels. */
export function place({ low, high, from, to }: Scale, value: number): number {
  return from + ((value - low) / (high - low)) * (to - from);
}

/** What lands on a pixel: the inverse of `place`. */
export function valueAt({ low, high, from, to }: Scale, pixel: number): number {
  return low + ((pixel - from) / (to - from)) * (high - low);
}

/** From when to when a card is drawn, seconds from the switch: what it holds, at least a horizon before to the switch. */
export function cardSpan({ t, at, horizon }: SwitchCard): [number, number] {
  const first = t.length > 0 ? t[0]! - at : 0;
  const last = t.length > 0 ? t[t.length - 1]! - at : 0;
  return [Math.min(-1.05 * horizon, first), Math.max(0.1 * horizon, last)];
}

/** Least and greatest finite value of a list and of `others`, with a margin; [0, 1] where there is none. */
export function rangeOf(values: Float64Array, others: readonly number[] = []): [number, number] {
  let low = Infinity;
  let high = -Infinity;
  for (const value of [...others, ...values]) {
    if (!Number.isFinite(value)) continue;
    low = Math.min(low, value);
    high = Math.max(high, value);
  }
  if (low > high) return [0, 1];
  const margin = high > low ? 0.08 * (high - low) : 0.05 * Math.abs(low || 20);
  return [low - margin, high + margin];
}

/**
 * A line as the `d` of an SVG path, broken where values are missing. Where several samples share a pixel column the
 * first, the least, the greatest and the last of them are kept, so that no peak is lost and the path stays short.
 *
 * @param t      ascending, seconds, as long as `values`
 * @param values NaN where missing
 */
export function pathOf(t: Float64Array, values: Float64Array, x: Scale, y: Scale): string {
  const parts: string[] = [];
  let pen: 'M' | 'L' = 'M';
  const put = (i: number) => {
    parts.push(`${pen}${place(x, t[i]!).toFixed(1)},${place(y, values[i]!).toFixed(1)}`);
    pen = 'L';
  };
  for (let i = 0; i < t.length; ) {
    if (!Number.isFinite(values[i]!)) {
      pen = 'M';
      i++;
      continue;
    }
    const column = Math.round(place(x, t[i]!));
    let [least, greatest, last] = [i, i, i];
    for (let j = i + 1; j < t.length && Number.isFinite(values[j]!); j++) {
      if (Math.round(place(x, t[j]!)) !== column) break;
      if (values[j]! < values[least]!) least = j;
      if (values[j]! > values[greatest]!) greatest = j;
      last = j;
    }
    for (const kept of [...new Set([i, least, greatest, last])].sort((a, b) => a - b)) put(kept);
    i = last + 1;
  }
  return parts.join('');
}

/** Ticks of the time axis, seconds from the switch, the switch itself among them; about one in 70 pixels. */
export function secondsTicks(from: number, to: number, pixels: number): number[] {
  const step = timeStep(to - from, Math.max(2, Math.floor(pixels / 70)));
  const ticks: number[] = [];
  for (let k = Math.ceil(from / step); k * step <= to; k++) ticks.push(Number((k * step).toPrecision(12)));
  return ticks;
}

/** Index of the entry of `t` nearest to a time; −1 where there is none. */
export function nearestIndex(t: Float64Array, time: number): number {
  let [low, high] = [0, t.length - 1];
  if (high < 0) return -1;
  while (high - low > 1) {
    const middle = (low + high) >> 1;
    if (t[middle]! <= time) low = middle;
    else high = middle;
  }
  return Math.abs(t[high]! - time) < Math.abs(t[low]! - time) ? high : low;
}
