import { createHash } from 'node:crypto';
import { heading } from './csvHeader.ts';
import { readRows } from './csvRows.ts';
import type { RecordedChannel, Recording } from './recording.ts';

/** How a CSV file is to be read. */
export interface CsvOptions {
  /** seconds between rows, for a file without a time column */
  interval?: number | undefined;
}

/**
 * Reads a CSV file: a header, a time column (seconds or RFC 3339), one numeric channel or more. An empty cell, NaN, NA or
 * null is a gap. The channels share one array of times.
 *
 * @param data the file's bytes, or its text
 * @param name what the file is called in the recording and in sentences
 * @throws InputError with a code CSV_… and a sentence naming line, column and cell
 * @see RFC 4180 (2005), section 2
 */
export function readCsv(data: string | Uint8Array, name: string, options: CsvOptions = {}): Recording {
  const bytes = typeof data === 'string' ? new TextEncoder().encode(data) : data;
  const { layout, times, values } = readRows(bytes, name, options.interval);
  const channels = layout.columns.flatMap(({ name: channel, unit }, index) =>
    index === layout.time ? [] : [{ channel, unit, times, values: values[index]! }],
  );
  return { name, channels, sha256: createHash('sha256').update(bytes).digest('hex') };
}

/**
 * A recording as CSV text that reads back to the same numbers, bit for bit: shortest digits that do, NaN as an empty cell.
 * Channels whose times differ share a row where they agree and have a gap where they do not.
 */
export function writeCsv(recording: Recording): string {
  return [...csvPieces(recording)].join('');
}

const ROWS_A_PIECE = 4096;

/** As `writeCsv`, in pieces of some thousand rows, for files that are larger than a string may be. */
export function* csvPieces(recording: Recording): Generator<string> {
  const { channels } = recording;
  const names = ['time', ...channels.map(({ channel, unit }) => heading(channel, unit))];
  let piece = `${names.map(quoted).join(',')}\r\n`;
  const next = channels.map(() => 0);
  for (let rows = 1; ; rows++) {
    const time = earliest(channels, next);
    if (time === Number.POSITIVE_INFINITY) break;
    piece += numberText(time);
    for (let c = 0; c < channels.length; c++) {
      const { times, values } = channels[c]!;
      piece += ',';
      if (times[next[c]!] === time) piece += numberText(values[next[c]!++]!);
    }
    piece += '\r\n';
    if (rows % ROWS_A_PIECE !== 0) continue;
    yield piece;
    piece = '';
  }
  yield piece;
}

function earliest(channels: RecordedChannel[], next: number[]): number {
  let time = Number.POSITIVE_INFINITY;
  for (let c = 0; c < channels.length; c++) time = Math.min(time, channels[c]!.times[next[c]!] ?? time);
  return time;
}

function numberText(value: number): string {
  if (!Number.isFinite(value)) return '';
  return Object.is(value, -0) ? '-0' : String(value);
}

function quoted(text: string): string {
  return /[",;\t\r\n]|^#|^\s|\s$/.test(text) ? `"${text.replaceAll('"', '""')}"` : text;
}
