import type { Columns } from '../../../shared-types/channel.ts';
import type { DrawnTrace } from './rehearsalMessages.ts';

/**
 * Drawing data of a trace over [from, to]: least and greatest value in each of `columns` equal columns, or the values
 * themselves where there are no more; NaN where nothing was seen.
 */
export function traceColumns(trace: DrawnTrace, from: number, to: number, columns: number): Columns {
  const { start, interval, value } = trace;
  const first = Math.max(0, Math.ceil((from - start) / interval));
  const last = Math.min(value.length - 1, Math.floor((to - start) / interval));
  const count = Math.max(0, last - first + 1);
  const size = Math.max(1, Math.ceil(count / columns));
  const length = Math.ceil(count / size);
  const out = { t: new Float64Array(length), low: new Float64Array(length), high: new Float64Array(length) };
  for (let column = 0; column < length; column++) {
    const begin = first + column * size;
    let low = Number.POSITIVE_INFINITY;
    let high = Number.NEGATIVE_INFINITY;
    for (let i = begin; i < Math.min(begin + size, last + 1); i++) {
      if (value[i]! < low) low = value[i]!;
      if (value[i]! > high) high = value[i]!;
    }
    out.t[column] = start + begin * interval;
    out.low[column] = low > high ? Number.NaN : low;
    out.high[column] = low > high ? Number.NaN : high;
  }
  return out;
}
