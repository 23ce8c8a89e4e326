import { describe, expect, it } from 'vitest';
import { LONGEST_PAUSE, pauseAfter, retryAfter } from '../../../../server/gateway/delivery/backOff.ts';

describe('the pause after failures', () => {
  it('doubles with each failure up to the longest', () => {
    expect([1, 2, 3, 4].map((failures) => pauseAfter(failures, 0, null))).toEqual([0.5, 1, 2, 4]);
    expect(pauseAfter(50, 0, null)).toBe(LONGEST_PAUSE);
    expect(pauseAfter(5000, 0, null)).toBe(LONGEST_PAUSE);
  });

  it('is shortened by chance, by up to half', () => {
    expect(pauseAfter(3, 0.5, null)).toBe(1.5);
    expect(pauseAfter(3, 1, null)).toBe(1);
  });

  it('is no shorter than what the receiver asked for, within reason', () => {
    expect(pauseAfter(1, 0, 20)).toBe(20);
    expect(pauseAfter(4, 0, 2)).toBe(4);
    expect(pauseAfter(1, 0, 1e9)).toBe(300);
  });
});

describe('a Retry-After header', () => {
  it('is a number of seconds or a date (RFC 9110, 10.2.3), or says nothing', () => {
    // the date of RFC 9110's own example
    const then = Date.UTC(1999, 11, 31, 23, 59, 59) / 1000;
    expect(retryAfter('120', 0)).toBe(120);
    expect(retryAfter('Fri, 31 Dec 1999 23:59:59 GMT', then - 30)).toBe(30);
    expect(retryAfter('Fri, 31 Dec 1999 23:59:59 GMT', then + 30)).toBe(0);
    expect(retryAfter('soon', 0)).toBeNull();
    expect(retryAfter(null, 0)).toBeNull();
  });
});
