import type { LogbookEntry } from '../../../shared-types/logbook.ts';

const columns: readonly [string, (entry: LogbookEntry) => string | number | null | undefined][] = [
  ['time', (entry) => entry.time],
  ['utc', (entry) => utc(entry.time)],
  ['kind', (entry) => entry.kind],
  ['channel', (entry) => entry.warning?.channels.join('; ') ?? entry.channel],
  ['watch', (entry) => entry.name],
  ['text', (entry) => entry.text],
  ['became', (entry) => entry.became],
  ['by', (entry) => entry.by],
  ['at', (entry) => entry.at],
  ['span_from', (entry) => entry.warning?.from],
  ['span_to', (entry) => entry.warning?.to],
  ['variable', (entry) => entry.warning?.variable],
  ['value', (entry) => entry.warning?.value],
  ['threshold', (entry) => entry.warning?.threshold],
  ['outcome', (entry) => entry.warning?.outcome ?? entry.switch?.outcome],
  ['lead', (entry) => entry.warning?.lead ?? entry.switch?.lead],
  ['regime_from', (entry) => entry.switch?.from],
  ['regime_to', (entry) => entry.switch?.to],
  ['made_at', (entry) => entry.warning?.madeAt],
  ['delivered_at', (entry) => entry.warning?.deliveredAt],
  ['acknowledged_at', (entry) => entry.warning?.acknowledgedAt],
  ['key', (entry) => entry.key],
];

/** First record of the file: the names of the columns. */
export const LOGBOOK_HEADER = record(columns.map(([name]) => name));

/** A line of the logbook as a record by RFC 4180. Times are seconds; an empty field where there is nothing to say. */
export function logbookRecord(entry: LogbookEntry): string {
  return record(columns.map(([, of]) => of(entry) ?? ''));
}

function record(fields: (string | number)[]): string {
  return `${fields.map((field) => quoted(String(field))).join(',')}\r\n`;
}

/** Quoted where it holds a comma, a quote or a line break (RFC 4180, section 2, rules 6 and 7). */
function quoted(field: string): string {
  return /[",\r\n]/.test(field) ? `"${field.replaceAll('"', '""')}"` : field;
}

/** RFC 3339 with milliseconds; null for elapsed time, which is no time of day. */
function utc(time: number): string | null {
  return time < 1e8 ? null : new Date(Math.round(time * 1000)).toISOString();
}
