import { createHash } from 'node:crypto';
import { describe, expect, test } from 'vitest';
import { csvPieces, readCsv, writeCsv } from '../../../server/recordings/csv.ts';

const columns = (text: string, options = {}) =>
  readCsv(text, 'a.csv', options).channels.map(({ channel, unit, values }) => ({
    channel,
    unit,
    values: [...values],
  }));

test('names, units in brackets or parentheses, times and values are read', () => {
  const recording = readCsv('time [s],left [K],right (mV)\n0,1,-2.5\n0.5,1e3,+4\n', 'a.csv');
  expect(recording.channels.map(({ channel, unit }) => [channel, unit])).toEqual([
    ['left', 'K'],
    ['right', 'mV'],
  ]);
  expect([...recording.channels[0]!.times]).toEqual([0, 0.5]);
  expect([...recording.channels[0]!.values]).toEqual([1, 1000]);
  expect([...recording.channels[1]!.values]).toEqual([-2.5, 4]);
});

test('the SHA-256 is that of the bytes', () => {
  const bytes = Buffer.from('t,x\n0,1\n');
  expect(readCsv(bytes, 'a.csv').sha256).toBe(createHash('sha256').update(bytes).digest('hex'));
});

test('empty cells and the words for nothing are gaps', () => {
  expect(columns('t,x,y\n0,,1\n1,NaN,2\n2,NA,3\n3,null,4\n4,inf,5\n')).toEqual([
    { channel: 'x', unit: '', values: [Number.NaN, Number.NaN, Number.NaN, Number.NaN, Number.NaN] },
    { channel: 'y', unit: '', values: [1, 2, 3, 4, 5] },
  ]);
});

test('semicolons let the comma be the decimal mark, tabs too, and a point still works', () => {
  expect(columns('t;x\n0;1,5\n0,5;2.5\n')[0]!.values).toEqual([1.5, 2.5]);
  expect(columns('t\tx\n0\t1,5\n')[0]!.values).toEqual([1.5]);
});

test('byte order mark, CRLF, comments, blank lines at the end and a missing last newline are no trouble', () => {
  expect(columns('\uFEFF# made by hand\r\nt,x\r\n0,1\r\n# touched it\r\n1,2\r\n\r\n\r\n')[0]!.values).toEqual(
    [1, 2],
  );
  expect(columns('t,x\n0,1\n1,2')[0]!.values).toEqual([1, 2]);
  expect(columns('t,x\n0,1\n1,')[0]!.values).toEqual([1, Number.NaN]);
});

test('the time column may stand anywhere, be RFC 3339, or be in another unit', () => {
  expect([
    ...readCsv('x,Timestamp\n7,2024-05-17T00:00:00Z\n8,2024-05-17T00:00:00.25Z\n', 'a').channels[0]!.times,
  ]).toEqual([1715904000, 1715904000.25]);
  expect([...readCsv('time [ms],x\n1,7\n2,8\n', 'a').channels[0]!.times]).toEqual([0.001, 0.002]);
  expect(columns('seconds,x\n0,7\n')[0]!.channel).toBe('x');
});

test('the first column is the time where none is named so; with an interval rows are counted instead', () => {
  expect([...readCsv('a,b\n5,1\n6,2\n', 'a').channels[0]!.times]).toEqual([5, 6]);
  const counted = readCsv('a,b\n5,1\n4,2\n', 'a', { interval: 0.5 });
  expect(counted.channels.map(({ channel }) => channel)).toEqual(['a', 'b']);
  expect([...counted.channels[0]!.times]).toEqual([0, 0.5]);
});

test('a blank line in a file of one column is a gap, at the end it is none', () => {
  expect(columns('x\n1\n\n3\n\n', { interval: 1 })[0]!.values).toEqual([1, Number.NaN, 3]);
});

describe('what cannot be used gets a code and a sentence with file, line, column and cell', () => {
  test.each([
    ['', 'CSV_EMPTY', ['a.csv', 'empty']],
    ['\n\n# only a comment\n', 'CSV_EMPTY', ['a.csv']],
    ['t,x\n', 'CSV_NO_ROWS', ['a.csv', 'no row']],
    ['0,1\n1,2\n', 'CSV_NO_HEADER', ['line 1', 'time,x']],
    ['time\n1\n', 'CSV_NO_CHANNEL', ['time', '--interval']],
    ['t,x,x\n0,1,2\n', 'CSV_SAME_NAME', ['"x"']],
    ['t,x\n0,1\n1,hot\n', 'CSV_TEXT_CELL', ['line 3', '"x"', '"hot"']],
    ['t,x\n0,1.2.3\n', 'CSV_TEXT_CELL', ['line 2', '"1.2.3"']],
    ['t,x\n0,1e\n', 'CSV_TEXT_CELL', ['"1e"']],
    ['t,x\n0,1\n0,2\n', 'CSV_TIME_BACKWARDS', ['line 3', 'sort the rows']],
    ['# c\na,x\n5,1\n3,2\n', 'CSV_TIME_BACKWARDS', ['line 4', '"a" was taken for the time', '--interval']],
    ['t,x\nsoon,1\n', 'CSV_BAD_TIME', ['line 2', '"soon"']],
    ['t,x\n,1\n', 'CSV_BAD_TIME', ['line 2']],
    ['t,x\n2024-13-01T00:00:00Z,1\n', 'CSV_BAD_TIME', ['line 2', 'no month 13']],
    ['t [fortnights],x\n1,1\n', 'CSV_BAD_TIME', ['fortnights']],
    ['t,x\n0,1\n1\n', 'CSV_RAGGED', ['line 3', '1 cell ', '2']],
    ['t,x\n0,1,2,3\n', 'CSV_RAGGED', ['line 2', '4 cells']],
    ['t,x\n0,1\n\n1,2\n', 'CSV_RAGGED', ['line 3']],
    ['t,"x\n0,1\n', 'CSV_OPEN_QUOTE', ['line 1']],
    ['t,"x" y\n0,1\n', 'CSV_AFTER_QUOTE', ['line 1']],
  ])('%j is %s', (text, code, parts) => {
    let fault: unknown;
    try {
      readCsv(text, 'a.csv');
    } catch (thrown) {
      fault = thrown;
    }
    expect(fault).toMatchObject({ code });
    for (const part of parts) expect((fault as Error).message).toContain(part);
  });
});

test('numbers read as the language reads them, long or short, near the ends of the range', () => {
  const texts = [
    '0.1',
    '123456789012345678',
    '1.7976931348623157e308',
    '5e-324',
    '2.2250738585072014e-308',
    '9007199254740993',
    '0.30000000000000004',
    '1e22',
    '1e23',
    '1e-22',
    '.5',
    '5.',
    '-0',
    '000123.4500',
  ];
  const read = readCsv(`t,x\n${texts.map((text, i) => `${i},${text}`).join('\n')}\n`, 'a').channels[0]!
    .values;
  texts.forEach((text, i) => {
    expect(Object.is(read[i], Number(text)), text).toBe(true);
  });
});

test('channels with times of their own share a row where they agree', () => {
  const text = writeCsv({
    name: 'r',
    sha256: '',
    channels: [
      { channel: 'a', unit: 'K', times: Float64Array.of(0, 1), values: Float64Array.of(5, 6) },
      { channel: 'b, c', unit: '', times: Float64Array.of(1, 2), values: Float64Array.of(7, 8) },
    ],
  });
  expect(text).toBe('time,a [K],"b, c"\r\n0,5,\r\n1,6,7\r\n2,,8\r\n');
});

test('a long recording is written in pieces that together are the whole', () => {
  const times = Float64Array.from({ length: 10_000 }, (_, i) => i / 7);
  const recording = { name: 'r', sha256: '', channels: [{ channel: 'x', unit: '', times, values: times }] };
  const pieces = [...csvPieces(recording)];
  expect(pieces.length).toBeGreaterThan(1);
  expect(readCsv(pieces.join(''), 'r').channels[0]).toEqual({ ...recording.channels[0]!, values: times });
});
