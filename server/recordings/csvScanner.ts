import { InputError } from '../signal/inputError.ts';

const NEWLINE = 10;
const RETURN = 13;
const QUOTE = 34;
const HASH = 35;
const SPACE = 32;
const TAB = 9;
const SEMICOLON = 59;
const COMMA = 44;

/** Where the scanner is: the cell [cellFrom, cellTo) it read last and what follows it. */
export interface CsvScanner {
  bytes: Uint8Array;
  at: number;
  line: number;
  separator: number;
  /** the cell, without its quotes and the blanks around it */
  cellFrom: number;
  cellTo: number;
  quoted: boolean;
  lastOfRow: boolean;
}

/** Moves over blank lines and comments; returns how many blank ones there were. */
export function skipBlank(scanner: CsvScanner): number {
  const { bytes } = scanner;
  let blank = 0;
  while (scanner.at < bytes.length) {
    const byte = bytes[scanner.at];
    if (byte === HASH) {
      while (scanner.at < bytes.length && bytes[scanner.at] !== NEWLINE) scanner.at++;
      scanner.at++;
    } else if (byte === NEWLINE) {
      scanner.at++;
      blank++;
    } else if (byte === RETURN && (bytes[scanner.at + 1] ?? NEWLINE) === NEWLINE) {
      scanner.at += 2;
      blank++;
    } else break;
    scanner.line++;
  }
  return blank;
}

/** The separator of the line at `from`: a tab if it has one outside quotes, else a semicolon, else a comma. */
export function separatorOf(bytes: Uint8Array, from: number): number {
  let quoted = false;
  let semicolon = false;
  for (let i = from; i < bytes.length && (quoted || bytes[i] !== NEWLINE); i++) {
    if (bytes[i] === QUOTE) quoted = !quoted;
    else if (!quoted && bytes[i] === TAB) return TAB;
    else if (!quoted && bytes[i] === SEMICOLON) semicolon = true;
  }
  return semicolon ? SEMICOLON : COMMA;
}

/**
 * Moves to the next cell: its bounds, and whether it ends its row.
 *
 * @throws InputError CSV_OPEN_QUOTE, CSV_AFTER_QUOTE
 */
export function nextCell(scanner: CsvScanner, file: string): void {
  const { bytes, separator } = scanner;
  const end = bytes.length;
  let at = scanner.at;
  while (at < end && bytes[at] === SPACE) at++;
  scanner.quoted = bytes[at] === QUOTE;
  let from = at;
  let to: number;
  if (scanner.quoted) {
    from = ++at;
    const opened = scanner.line;
    for (; ; at++) {
      if (at >= end)
        throw new InputError(
          'CSV_OPEN_QUOTE',
          `${file} line ${opened} opens a quote that is never closed; expected a second "; close it or remove it`,
        );
      if (bytes[at] === NEWLINE) scanner.line++;
      if (bytes[at] !== QUOTE) continue;
      if (bytes[at + 1] !== QUOTE) break;
      at++;
    }
    to = at++;
    while (at < end && (bytes[at] === SPACE || bytes[at] === RETURN)) at++;
    if (at < end && bytes[at] !== separator && bytes[at] !== NEWLINE)
      throw new InputError(
        'CSV_AFTER_QUOTE',
        `${file} line ${scanner.line} has text after a closing quote; expected a separator or the end of the line; ` +
          'double a quote that belongs to the text',
      );
  } else {
    while (at < end && bytes[at] !== separator && bytes[at] !== NEWLINE) at++;
    to = at;
    while (to > from && (bytes[to - 1] === SPACE || bytes[to - 1] === RETURN)) to--;
  }
  scanner.cellFrom = from;
  scanner.cellTo = to;
  scanner.lastOfRow = at >= end || bytes[at] === NEWLINE;
  scanner.at = at + 1;
  if (scanner.lastOfRow && at < end) scanner.line++;
}

/** The cell as text, doubled quotes made single. */
export function cellText({ bytes, cellFrom, cellTo, quoted }: CsvScanner): string {
  const text = new TextDecoder().decode(bytes.subarray(cellFrom, cellTo));
  return quoted ? text.replaceAll('""', '"') : text.trim();
}
