import { clockText } from '../words.ts';

const UNIX_FROM = 1e8;

/**
 * A moment as a person types it: `14:02:10.5`, `14:02`, seconds where time is elapsed, or RFC 3339. A time of day is
 * meant on a day between `from` and `to` (s), the first on which it lies between them; null where nothing fits.
 */
export function momentOf(text: string, from: number, to: number): number | null {
  const plain = text.trim().replace(/\s*elapsed$/, '');
  const clock = /^(\d{1,5}):([0-5]?\d)(?::([0-5]?\d(?:\.\d+)?))?$/.exec(plain);
  if (clock !== null) {
    const seconds = 3600 * Number(clock[1]) + 60 * Number(clock[2]) + Number(clock[3] ?? 0);
    if (from < UNIX_FROM) return seconds;
    if (Number(clock[1]) > 23) return null;
    const day = 86400 * Math.floor(from / 86400);
    for (let time = day + seconds; time <= to + 60; time += 86400) if (time >= from - 60) return time;
    return day + seconds;
  }
  if (/^[−-]?\d+(\.\d+)?$/.test(plain)) {
    const value = Number(plain.replace('−', '-'));
    return from < UNIX_FROM || value > UNIX_FROM ? value : null;
  }
  const date = /^\d{4}-\d\d-\d\d[T ]/.test(plain) ? Date.parse(withZone(plain)) : NaN;
  return Number.isFinite(date) ? date / 1000 : null;
}

/** Times of the page are UTC: a date without a zone is read so. */
const withZone = (text: string): string => (/(Z|[+-]\d\d:?\d\d)$/i.test(text) ? text : `${text}Z`);

/** A moment as a field shows it: as exact as a tenth of a second, RFC 3339 where the time of day alone would be another day. */
export function momentField(time: number, from: number, to: number): string {
  const short = clockText(time, 1).replace(' elapsed', '');
  const again = momentOf(short, from, to);
  if (again !== null && Math.abs(again - time) < 0.2) return short;
  return new Date(Math.round(time * 10) * 100).toISOString().replace(/0*Z$/, 'Z').replace('.Z', 'Z');
}
