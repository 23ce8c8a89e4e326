import { describe, expect, it } from 'vitest';
import { createLines, order, put, remove, unsettled } from '../../../client/logbook/lines.ts';
import { keyOf } from '../../../client/logbook/reader.ts';
import { dayText } from '../../../client/logbook/row.ts';
import type { FeedMessage } from '../../../shared-types/feed.ts';
import type { LogbookEntry } from '../../../shared-types/logbook.ts';
import type { SwitchEvent } from '../../../shared-types/warning.ts';
import { switchAt, warning } from '../fixtures.ts';

const line = (key: string, time: number, changes: Partial<LogbookEntry> = {}): LogbookEntry => ({
  key,
  kind: 'note',
  time,
  at: null,
  channel: null,
  watch: null,
  name: null,
  by: '',
  text: key,
  became: '',
  waits: false,
  warning: null,
  switch: null,
  ...changes,
});

const switchEvent = (changes: Partial<SwitchEvent>): SwitchEvent => ({ ...switchAt(5, 0, 1), ...changes });

const keys = (lines: ReturnType<typeof createLines>) => lines.entries.map(({ key }) => key);

describe('the lines', () => {
  it('stand newest first, equal times in the server’s order, whatever order they come in', () => {
    const lines = createLines();
    const all = ['warning 2', 'warning 1', 'switch 9', 'log 10', 'log 9'].map((key) => line(key, 5));
    const mixed = [line('log 1', 1), all[3]!, all[0]!, line('log 99', 9), all[4]!, all[2]!, all[1]!];
    for (const each of mixed) expect(put(lines, each)).toBe('new');
    expect(keys(lines)).toEqual(['log 99', ...all.map(({ key }) => key), 'log 1']);
    expect([...lines.entries].sort(order)).toEqual(lines.entries);
  });

  it('say whether a line is the same, changed or moved', () => {
    const lines = createLines();
    put(lines, line('log 1', 1));
    put(lines, line('warning 1', 2));
    expect(put(lines, line('warning 1', 2))).toBe('same');
    expect(put(lines, line('warning 1', 2, { became: 'came true' }))).toBe('changed');
    expect(lines.entries[0]!.became).toBe('came true');
    expect(put(lines, line('warning 1', 0.5))).toBe('moved');
    expect(keys(lines)).toEqual(['log 1', 'warning 1']);
    expect(remove(lines, 'log 1')).toBe(true);
    expect(remove(lines, 'log 1')).toBe(false);
    expect(keys(lines)).toEqual(['warning 1']);
  });

  it('know which may still change: open or unacknowledged warnings, switches not judged', () => {
    const lines = createLines();
    put(lines, line('log 1', 1));
    put(lines, line('warning 1', 2, { warning: warning({ outcome: 'open', acknowledgedAt: 1 }) }));
    put(lines, line('warning 2', 3, { warning: warning({ outcome: 'true', acknowledgedAt: 1 }) }));
    put(lines, line('warning 3', 4, { warning: warning({ outcome: 'true', acknowledgedAt: null }) }));
    put(lines, line('switch 1', 5, { switch: switchEvent({ outcome: 'pending' }) }));
    expect(unsettled(lines, 10)).toEqual(['switch 1', 'warning 3', 'warning 1']);
    expect(unsettled(lines, 1)).toEqual(['switch 1']);
  });
});

describe('the feed', () => {
  it('names the line that a message is about', () => {
    const told: FeedMessage[] = [
      { kind: 'warning', warning: warning({ id: 4 }) },
      { kind: 'switch', switch: switchEvent({ id: 5 }) },
      { kind: 'switch', switch: switchEvent({ id: -1 }) },
      { kind: 'beat', serverTime: 1 },
    ];
    expect(told.map(keyOf)).toEqual(['warning 4', 'switch 5', null, null]);
  });
});

describe('a day', () => {
  it('is named in full, in UTC', () => {
    expect(dayText(1_796_115_600)).toBe('Tuesday 1 December 2026');
    expect(dayText(12)).toBe('Elapsed time');
  });
});
