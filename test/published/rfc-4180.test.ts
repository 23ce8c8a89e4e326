/**
 * RFC 4180, "Common Format and MIME Type for CSV Files" (Y. Shafranovich, 2005), section 2, rules 1 to 7. From memory;
 * the rules' own examples hold letters, here numbers stand in the rows, since a recording has no text cells:
 *
 *   1 records end in CRLF         2 the last one may lack it        3 an optional header line
 *   4 spaces belong to a field (read more leniently here: blanks around a number are passed over)
 *   5 fields may be in quotes     6 line breaks, quotes and commas then belong to the field
 *   7 a quote inside quotes is doubled
 */
import { expect, test } from 'vitest';
import { readCsv, writeCsv } from '../../server/recordings/csv.ts';

const read = (text: string) => readCsv(text, 'a.csv').channels;

test('rules 1 to 3: records end in CRLF, the last may lack it, the header names the fields', () => {
  for (const text of ['t,bbb,ccc\r\n1,2,3\r\n4,5,6\r\n', 't,bbb,ccc\r\n1,2,3\r\n4,5,6'])
    expect(read(text).map(({ channel, values }) => [channel, ...values])).toEqual([
      ['bbb', 2, 5],
      ['ccc', 3, 6],
    ]);
});

test('rule 5: fields may or may not be in quotes', () => {
  expect([...read('"t","bbb"\r\n"1","2"\r\n3,"4.5"\r\n')[0]!.values]).toEqual([2, 4.5]);
});

test('rules 6 and 7: a quoted field may hold line breaks, commas and doubled quotes', () => {
  const channels = read('t,"b\r\nbb","c,cc","d""dd"\r\n1,2,3,4\r\n');
  expect(channels.map(({ channel }) => channel)).toEqual(['b\r\nbb', 'c,cc', 'd"dd']);
  expect(channels.map(({ values }) => values[0])).toEqual([2, 3, 4]);
});

test('every record must have as many fields as the header, and the line is told though a name spans two', () => {
  expect(() => read('t,"b\r\nbb"\r\n1,2\r\n3\r\n')).toThrow(/line 4 /);
});

test('what is written follows the rules and reads back', () => {
  const one = Float64Array.of(1);
  const names = ['plain', 'b\r\nbb', 'c,cc', 'd"dd', '# e', ' f '];
  const text = writeCsv({
    name: 'r',
    sha256: '',
    channels: names.map((channel) => ({ channel, unit: '', times: one, values: one })),
  });
  expect(text).toBe('time,plain,"b\r\nbb","c,cc","d""dd","# e"," f "\r\n1,1,1,1,1,1,1\r\n');
  expect(read(text).map(({ channel }) => channel)).toEqual(names);
});
