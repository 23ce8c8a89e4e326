import { InputError } from './inputError.ts';

const SHAPE =
  /^(\d{4})-(\d{2})-(\d{2})[Tt ](\d{2}):(\d{2}):(\d{2})(?:\.(\d+))?(?:([Zz])|([+-])(\d{2}):(\d{2}))$/;

/** Whether `text` has the shape of an RFC 3339 date-time; its numbers may still be out of range. */
export function looksLikeTime(text: string): boolean {
  return SHAPE.test(text);
}

/**
 * Unix seconds of an RFC 3339 date-time, the float64 nearest to it. A space may stand for the T (RFC 3339,
 * section 5.6). Unix time has no leap seconds: 23:59:60 UTC on the last day of a month reads as the second
 * that follows it, any other second 60 is refused.
 *
 * @throws InputError BAD_TIME where the text is not a complete date-time or names a moment that does not exist
 * @see RFC 3339 (2002), sections 5.6 and 5.7
 */
export function parseTime(text: string): number {
  const parts = SHAPE.exec(text);
  if (parts === null) throw badTime(text, 'it is not a complete date-time');
  const [year, month, day, hour, minute, second] = parts.slice(1, 7).map(Number) as number[];
  const fault = outOfRange(year!, month!, day!, hour!, minute!, second!, parts);
  if (fault !== null) throw badTime(text, fault);
  const sign = parts[9] === '-' ? -1 : 1;
  const offset = parts[8] === undefined ? sign * (Number(parts[10]) * 3600 + Number(parts[11]) * 60) : 0;
  const whole = daysFrom1970(year!, month!, day!) * 86400 + hour! * 3600 + minute! * 60 + second! - offset;
  if (second === 60 && !startsMonth(whole)) throw badTime(text, 'no leap second can be inserted there');
  return withFraction(whole, parts[7]);
}

function badTime(text: string, fault: string): InputError {
  return new InputError(
    'BAD_TIME',
    `"${text.slice(0, 60)}" is not a time that can be used: ${fault}; expected seconds or an RFC 3339 ` +
      'date-time with its offset; write it like 2024-05-17T09:30:00.25Z or 2024-05-17T11:30:00.25+02:00',
  );
}

function outOfRange(
  year: number,
  month: number,
  day: number,
  hour: number,
  minute: number,
  second: number,
  parts: RegExpExecArray,
): string | null {
  if (month < 1 || month > 12) return `there is no month ${month}`;
  if (day < 1 || day > daysInMonth(year, month)) return `that month has no day ${day}`;
  if (hour > 23) return `there is no hour ${hour}`;
  if (minute > 59) return `there is no minute ${minute}`;
  if (second > 60) return `there is no second ${second}`;
  if (Number(parts[10] ?? 0) > 23 || Number(parts[11] ?? 0) > 59) return 'its offset is out of range';
  return null;
}

function daysInMonth(year: number, month: number): number {
  if (month === 2) return (year % 4 === 0 && year % 100 !== 0) || year % 400 === 0 ? 29 : 28;
  return month === 4 || month === 6 || month === 9 || month === 11 ? 30 : 31;
}

function daysFrom1970(year: number, month: number, day: number): number {
  // Date.UTC reads years 0 to 99 as 1900 to 1999; 400 Gregorian years are 146097 days exactly
  return Date.UTC(year + 400, month - 1, day) / 86_400_000 - 146_097;
}

function startsMonth(seconds: number): boolean {
  return seconds % 86400 === 0 && new Date(seconds * 1000).getUTCDate() === 1;
}

function withFraction(whole: number, digits: string | undefined): number {
  if (digits === undefined) return whole;
  // read as one decimal number, so that it is rounded once
  return whole >= 0 ? Number(`${whole}.${digits}`) : whole + Number(`0.${digits}`);
}
