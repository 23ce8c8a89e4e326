import { describe, expect, it } from 'vitest';
import { createAllowance } from '../../../server/gateway/ingest/allowance.ts';
import { createLog, type LogLine, sparing } from '../../../server/gateway/logLines.ts';

const LINE: LogLine = { level: 'notice', event: 'request', text: 'a "b"\nc', who: 'desk', status: 201 };

describe('the log', () => {
  it('is one JSON object a line, with its time first, whatever a text holds', () => {
    const lines: string[] = [];
    const log = createLog(
      'json',
      (line) => lines.push(line),
      () => 1_777_622_400.25,
    );
    log(LINE);
    log({ ...LINE, level: 'error' });
    expect(lines.every((line) => line.endsWith('\n') && line.indexOf('\n') === line.length - 1)).toBe(true);
    expect(JSON.parse(lines[0]!)).toEqual({ time: '2026-05-01T08:00:00.250Z', ...LINE });
    expect(lines[0]).toMatch(/^\{"time":/);
  });

  it('as sentences tells warnings and errors alone', () => {
    const lines: string[] = [];
    const log = createLog(
      'sentences',
      (line) => lines.push(line),
      () => 0,
    );
    for (const level of ['notice', 'warning', 'error'] as const) log({ level, event: 'x', text: level });
    expect(lines).toEqual(['foreshift watch: warning\n', 'foreshift watch: error\n']);
  });

  it('can say the same seldom, with the count of what it did not say', () => {
    const texts: string[] = [];
    let now = 0;
    const log = sparing(
      ({ text }) => texts.push(text),
      10,
      () => now,
    );
    const say = (channel: string) =>
      log({ level: 'notice', event: 'frame refused', text: `of ${channel}`, channel });
    for (let n = 0; n < 5; n++) say('a');
    say('b');
    now = 10;
    say('a');
    say('b');
    expect(texts).toEqual(['of a', 'of b', 'of a (and 4 more like this before)', 'of b']);
  });
});

describe('an allowance', () => {
  it('lets through in the long run what it allows a second, and a second’s worth at once', () => {
    const allowance = createAllowance(100);
    let now = 50;
    for (let n = 0; n < 100; n++) expect(allowance.use(1, now)).toBe(0);
    expect(allowance.use(1, now)).toBeCloseTo(0.01, 9);
    let used = 0;
    for (const end = now + 20; now < end; used++) now += allowance.use(1, now);
    expect(used).toBeGreaterThan(1980);
    expect(used).toBeLessThan(2020);
    now += 1000;
    for (let n = 0; n < 100; n++) expect(allowance.use(1, now)).toBe(0);
    expect(allowance.use(1, now)).toBeGreaterThan(0);
  });
});
