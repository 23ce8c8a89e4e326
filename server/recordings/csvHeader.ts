import { InputError } from '../signal/inputError.ts';

/** One column of a CSV file by its heading. */
export interface CsvColumn {
  name: string;
  unit: string;
}

/** What a file's headings say of its columns. */
export interface CsvLayout {
  columns: CsvColumn[];
  /** index of the time column; −1 where rows are counted */
  time: number;
  /** a heading says that it is the time; else the first column is taken for it */
  timeIsNamed: boolean;
  /** numbers of the time column are divided by this to give seconds; NaN: only RFC 3339 times are expected */
  perSecond: number;
}

const TIME_NAME =
  /^(t|time([ _]?stamp)?|date([ _]?time)?|seconds?|secs?|elapsed([ _]?time)?|epoch|unix([ _]?time)?|utc)$/i;
const PER_SECOND: Record<string, number> = {
  '': 1,
  s: 1,
  sec: 1,
  second: 1,
  seconds: 1,
  ms: 1e3,
  us: 1e6,
  µs: 1e6,
  μs: 1e6,
  ns: 1e9,
  min: 1 / 60,
  h: 1 / 3600,
};

/**
 * Reads headings: `name [unit]` or `name (unit)`; the time column is the first one named time, t, seconds, timestamp,
 * date and the like, otherwise the first.
 *
 * @param cells headings, trimmed
 * @param file  the file's name, for sentences
 * @param line  the line they are on, from 1
 * @param countRows without a column named as the time, rows are counted instead of reading the first column
 * @throws InputError CSV_NO_HEADER, CSV_SAME_NAME, CSV_NO_CHANNEL
 */
export function readHeader(cells: string[], file: string, line: number, countRows: boolean): CsvLayout {
  if (cells.every((cell) => cell === '' || Number.isFinite(Number(cell.replace(',', '.')))))
    throw new InputError(
      'CSV_NO_HEADER',
      `${file} line ${line} holds numbers where the names of the columns are expected; ` +
        'put a line such as "time,x" above the first row',
    );
  const columns = cells.map(readHeading);
  const same = columns.find((column, index) => columns.findIndex((c) => c.name === column.name) < index);
  if (same !== undefined)
    throw new InputError(
      'CSV_SAME_NAME',
      `${file} line ${line} names two columns "${same.name}"; each needs a name of its own: rename one`,
    );
  const named = columns.findIndex((column) => TIME_NAME.test(column.name));
  const time = named >= 0 ? named : countRows ? -1 : 0;
  if (columns.length - (time >= 0 ? 1 : 0) === 0)
    throw new InputError(
      'CSV_NO_CHANNEL',
      `${file} has the time "${cells[0]}" and no column of numbers beside it; expected at least one channel; ` +
        'add one, or give --interval to count rows',
    );
  const unit = time >= 0 ? columns[time]!.unit : '';
  return { columns, time, timeIsNamed: named >= 0, perSecond: PER_SECOND[unit.toLowerCase()] ?? Number.NaN };
}

function readHeading(cell: string, index: number): CsvColumn {
  const parts = /^(.*?)\s*(?:\[([^[\]]*)\]|\(([^()]*)\))$/.exec(cell);
  const name = parts === null ? cell : parts[1]!;
  return { name: name === '' ? `column ${index + 1}` : name, unit: (parts?.[2] ?? parts?.[3] ?? '').trim() };
}

/** The heading of a channel: `name [unit]`, or the name alone. */
export function heading(name: string, unit: string): string {
  return unit === '' ? name : `${name} [${unit}]`;
}
