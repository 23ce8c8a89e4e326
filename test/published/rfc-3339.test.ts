/**
 * RFC 3339, "Date and Time on the Internet: Timestamps" (G. Klyne, C. Newman, 2002), section 5.8, Examples.
 * From memory, the epoch seconds of the first two recomputed independently:
 *
 *   1985-04-12T23:20:50.52Z          482196050.52
 *   1996-12-19T16:39:57-08:00        851042397, the same moment as 1996-12-20T00:39:57Z
 *   1990-12-31T23:59:60Z             a leap second inserted at the end of 1990
 *   1990-12-31T15:59:60-08:00        the same leap second in Pacific Standard Time
 *   1937-01-01T12:00:27.87+00:20     the same moment as 11:40:27.87Z
 */
import { expect, test } from 'vitest';
import { looksLikeTime, parseTime } from '../../server/signal/time.ts';

const refused = (text: string) => {
  expect(() => parseTime(text), text).toThrow(expect.objectContaining({ code: 'BAD_TIME' }));
};

test('the examples of section 5.8 read as the moments they name', () => {
  expect(parseTime('1985-04-12T23:20:50.52Z')).toBe(482196050.52);
  expect(parseTime('1996-12-19T16:39:57-08:00')).toBe(851042397);
  expect(parseTime('1996-12-20T00:39:57Z')).toBe(851042397);
  expect(parseTime('1937-01-01T12:00:27.87+00:20')).toBeCloseTo(
    Date.UTC(1937, 0, 1, 11, 40, 27, 870) / 1000,
    6,
  );
});

test('a leap second reads as the second after it, since Unix time has none', () => {
  expect(parseTime('1990-12-31T23:59:60Z')).toBe(Date.UTC(1991, 0, 1) / 1000);
  expect(parseTime('1990-12-31T15:59:60-08:00')).toBe(Date.UTC(1991, 0, 1) / 1000);
  expect(parseTime('1990-12-31T23:59:60.5Z')).toBe(Date.UTC(1991, 0, 1) / 1000 + 0.5);
});

test('a second 60 where no leap second can be is refused', () => {
  for (const text of ['1990-12-31T23:58:60Z', '1990-12-30T23:59:60Z', '1990-12-31T23:59:60-08:00'])
    refused(text);
});

test('an unknown local offset (-00:00) names the same moment as Z', () => {
  expect(parseTime('1996-12-20T00:39:57-00:00')).toBe(851042397);
});

test('lower case letters and a space between date and time are read', () => {
  expect(parseTime('1996-12-20t00:39:57z')).toBe(851042397);
  expect(parseTime('1996-12-20 00:39:57Z')).toBe(851042397);
});

test('every day from 1890 to 2110 agrees with the Gregorian calendar of the language', () => {
  for (let day = Date.UTC(1890, 0, 1); day < Date.UTC(2110, 0, 1); day += 86_400_000)
    expect(parseTime(new Date(day).toISOString())).toBe(day / 1000);
  expect(parseTime('0001-01-01T00:00:00Z')).toBe(-62135596800);
});

test('dates and times that do not exist, and shapes that RFC 3339 does not have, are refused', () => {
  const wrong = [
    '1996-13-01T00:00:00Z',
    '1995-02-29T00:00:00Z',
    '1900-02-29T00:00:00Z',
    '1996-04-31T00:00:00Z',
    '1996-12-20T24:00:00Z',
    '1996-12-20T00:60:00Z',
    '1996-12-20T00:00:61Z',
    '1996-12-20T00:39:57+24:00',
    '1996-12-20T00:39:57',
    '1996-12-20',
    '1996-12-20T00:39Z',
    '19961220T003957Z',
    '1996-12-20T00:39:57.Z',
    '1996-12-20T00:39:57,5Z',
    ' 1996-12-20T00:39:57Z',
    '',
  ];
  for (const text of wrong) refused(text);
  expect(parseTime('1996-02-29T00:00:00Z')).toBe(Date.UTC(1996, 1, 29) / 1000);
  expect(parseTime('2000-02-29T00:00:00Z')).toBe(Date.UTC(2000, 1, 29) / 1000);
});

test('the shape is told without judging the numbers', () => {
  expect(looksLikeTime('1996-13-45T00:00:00Z')).toBe(true);
  expect(looksLikeTime('12.5')).toBe(false);
});
