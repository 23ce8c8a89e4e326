import { InputError } from '../signal/inputError.ts';
import { looksLikeTime, parseTime } from '../signal/time.ts';
import { type CsvLayout, readHeader } from './csvHeader.ts';
import { type CsvScanner, cellText, nextCell, separatorOf, skipBlank } from './csvScanner.ts';
import { saysNothing, scanNumber } from './numberScanner.ts';

const COMMA = 44;
const POINT = 46;

/** A file's columns: `times` in seconds, one array of values a column (that of the time column is empty). */
export interface CsvTable {
  layout: CsvLayout;
  rows: number;
  times: Float64Array;
  values: Float64Array[];
}

/**
 * Reads a CSV file's bytes in one pass (RFC 4180; separator comma, semicolon or tab; `#` lines are comments).
 *
 * @param interval seconds between rows, for files without a time column
 * @throws InputError CSV_… with file, line (from 1), column and cell
 */
export function readRows(bytes: Uint8Array, file: string, interval: number | undefined): CsvTable {
  const start = bytes[0] === 0xef && bytes[1] === 0xbb && bytes[2] === 0xbf ? 3 : 0;
  const scanner: CsvScanner = {
    bytes,
    at: start,
    line: 1,
    separator: COMMA,
    cellFrom: 0,
    cellTo: 0,
    quoted: false,
    lastOfRow: false,
  };
  skipBlank(scanner);
  if (scanner.at >= bytes.length)
    throw new InputError(
      'CSV_EMPTY',
      `${file} is empty; expected a line of column names and rows below it; check the path or record again`,
    );
  scanner.separator = separatorOf(bytes, scanner.at);
  const headerLine = scanner.line;
  const cells: string[] = [];
  do {
    nextCell(scanner, file);
    cells.push(cellText(scanner));
  } while (!scanner.lastOfRow);
  const table = newTable(
    readHeader(cells, file, headerLine, interval !== undefined),
    bytes.length - scanner.at,
  );
  readBody(scanner, table, file, interval ?? Number.NaN);
  if (table.rows === 0)
    throw new InputError(
      'CSV_NO_ROWS',
      `${file} has column names and no row below them; expected at least one sample; record again or check the file`,
    );
  return trimmed(table);
}

function newTable(layout: CsvLayout, bytes: number): CsvTable {
  const rows = Math.max(16, Math.floor(bytes / (8 * layout.columns.length)));
  return {
    layout,
    rows: 0,
    times: new Float64Array(rows),
    values: layout.columns.map((_, index) => new Float64Array(index === layout.time ? 0 : rows)),
  };
}

function grow(table: CsvTable): void {
  const larger = (array: Float64Array) => {
    const next = new Float64Array(Math.ceil(array.length * 1.5));
    next.set(array);
    return next;
  };
  table.times = larger(table.times);
  table.values = table.values.map(larger);
}

function trimmed(table: CsvTable): CsvTable {
  const { rows, layout } = table;
  return {
    ...table,
    times: table.times.slice(0, rows),
    values: table.values.map((values, index) => values.slice(0, index === layout.time ? 0 : rows)),
  };
}

function readBody(scanner: CsvScanner, table: CsvTable, file: string, interval: number): void {
  const { layout } = table;
  const columns = layout.columns.length;
  const decimalMark = scanner.separator === COMMA ? POINT : COMMA;
  let before = Number.NEGATIVE_INFINITY;
  for (;;) {
    const blankLine = scanner.line;
    const blank = skipBlank(scanner);
    if (scanner.at >= scanner.bytes.length) return;
    if (blank > 0 && columns > 1) throw ragged(file, blankLine, 1, columns);
    for (let i = 0; i < blank; i++) addRow(table, interval, Number.NaN);
    const line = scanner.line;
    const row = table.rows;
    if (row === table.times.length) grow(table);
    let cells = 0;
    do {
      nextCell(scanner, file);
      if (cells === columns) throw ragged(file, line, countRest(scanner, file, cells + 1), columns);
      const column = cells++;
      if (column === layout.time) table.times[row] = timeCell(scanner, table, file, line, decimalMark);
      else table.values[column]![row] = valueCell(scanner, layout, column, file, line, decimalMark);
    } while (!scanner.lastOfRow);
    if (cells < columns) throw ragged(file, line, cells, columns);
    const time = layout.time < 0 ? row * interval : table.times[row]!;
    table.times[row] = time;
    if (time <= before) throw notAscending(file, line, before, time, layout);
    before = time;
    table.rows++;
  }
}

function addRow(table: CsvTable, interval: number, value: number): void {
  if (table.rows === table.times.length) grow(table);
  table.values[0]![table.rows] = value;
  table.times[table.rows] = table.rows * interval;
  table.rows++;
}

function numberCell({ bytes, cellFrom, cellTo }: CsvScanner, decimalMark: number): number {
  const value = scanNumber(bytes, cellFrom, cellTo, POINT);
  return decimalMark === POINT || !Number.isNaN(value) ? value : scanNumber(bytes, cellFrom, cellTo, COMMA);
}

function valueCell(
  scanner: CsvScanner,
  layout: CsvLayout,
  column: number,
  file: string,
  line: number,
  decimalMark: number,
): number {
  const value = numberCell(scanner, decimalMark);
  if (!Number.isNaN(value) || saysNothing(scanner.bytes, scanner.cellFrom, scanner.cellTo)) return value;
  throw new InputError(
    'CSV_TEXT_CELL',
    `${file} line ${line}, column "${layout.columns[column]!.name}": "${cellText(scanner).slice(0, 60)}" is not a number; ` +
      'expected one, or an empty cell for a gap; correct the cell or remove the column',
  );
}

function timeCell(
  scanner: CsvScanner,
  table: CsvTable,
  file: string,
  line: number,
  decimalMark: number,
): number {
  const { layout } = table;
  const value = numberCell(scanner, decimalMark);
  if (Number.isFinite(value) && !Number.isNaN(layout.perSecond)) return value / layout.perSecond;
  const text = cellText(scanner);
  const column = layout.columns[layout.time]!;
  if (looksLikeTime(text)) {
    try {
      return parseTime(text);
    } catch (fault) {
      throw new InputError(
        'CSV_BAD_TIME',
        `${file} line ${line}, column "${column.name}": ${(fault as Error).message}`,
      );
    }
  }
  const wanted = Number.isNaN(layout.perSecond)
    ? `a time in ${column.unit} is not known (s, ms, us, ns, min or h are)`
    : `"${text.slice(0, 60)}" is not a time`;
  throw new InputError(
    'CSV_BAD_TIME',
    `${file} line ${line}, column "${column.name}": ${wanted}; expected seconds or RFC 3339 such as ` +
      `2024-05-17T09:30:00Z; ${layout.timeIsNamed ? 'correct it' : 'name the time column "time", or give --interval'}`,
  );
}

function countRest(scanner: CsvScanner, file: string, cells: number): number {
  let count = cells;
  while (!scanner.lastOfRow) {
    nextCell(scanner, file);
    count++;
  }
  return count;
}

function ragged(file: string, line: number, cells: number, columns: number): InputError {
  return new InputError(
    'CSV_RAGGED',
    `${file} line ${line} has ${cells} ${cells === 1 ? 'cell' : 'cells'} where the header names ${columns}; ` +
      'expected as many cells in every row; complete the line or remove it',
  );
}

function notAscending(
  file: string,
  line: number,
  before: number,
  time: number,
  layout: CsvLayout,
): InputError {
  const name = layout.columns[layout.time]?.name ?? 'row';
  const hint = layout.timeIsNamed
    ? 'sort the rows or remove the repeated ones'
    : `"${name}" was taken for the time since no column is named so: name it "time", or give --interval`;
  return new InputError(
    'CSV_TIME_BACKWARDS',
    `${file} line ${line}: the time ${time} does not come after ${before} in the row before; ` +
      `expected times that ascend; ${hint}`,
  );
}
