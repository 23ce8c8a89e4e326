import { describe, expect, it } from 'vitest';
import { entryOf, logbookPage, placeOf, warningTimes } from '../../../../server/gateway/logbook/logbook.ts';
import { LOGBOOK_HEADER, logbookRecord } from '../../../../server/gateway/logbook/logbookCsv.ts';
import {
  clockText,
  spanText,
  switchBecame,
  switchText,
  warningBecame,
  warningText,
} from '../../../../server/gateway/logbook/logbookWords.ts';
import type { LogbookQuery, LogbookRow } from '../../../../server/store/logbook.ts';
import type { SwitchEvent, Warning } from '../../../../shared-types/warning.ts';

const T0 = 1_700_049_600;
const warning: Warning = {
  id: 0,
  watch: 'w',
  model: 'm',
  channels: ['Loop A'],
  at: T0,
  from: T0 + 4,
  to: T0 + 10,
  madeAt: T0 + 0.2,
  deliveredAt: null,
  variable: 'forcing',
  value: 2.123,
  threshold: 1.7,
  outcome: 'true',
  switchAt: T0 + 8,
  lead: 8,
  acknowledgedAt: T0 + 2,
  acknowledgedBy: 'A. Person',
  quiet: false,
};
const event: SwitchEvent = {
  id: 0,
  watch: 'w',
  channel: 'Loop A',
  at: T0 + 8,
  confirmedAt: T0 + 10.4,
  from: 0,
  to: 1,
  outcome: 'warned',
  warning: 1,
  lead: 8,
};
const watches = new Map([
  [
    'w',
    { name: 'Loop A', channels: ['Loop A'], switchWord: 'reversal', trigger: false, use: 'in use' as const },
  ],
]);
const row = (source: LogbookRow['source'], id: number, time: number, kept: object): LogbookRow => ({
  source,
  id,
  time,
  json: JSON.stringify(kept),
});

describe('the words of the logbook', () => {
  it('say what a warning said and what became of it', () => {
    expect(warningText(warning, 'reversal')).toBe(
      'reversal expected 12:00:04.0 to 12:00:10.0: forcing 2.12 sd, threshold 1.7 sd',
    );
    expect(warningText({ ...warning, quiet: true }, 'reversal')).toMatch(
      /too late to speak, nobody was called$/,
    );
    expect(warningBecame(warning, 'reversal')).toBe('came true: reversal after 8 s; acknowledged');
    const plain = { ...warning, lead: null, acknowledgedAt: null };
    const all = (['open', 'repeat', 'late', 'false', 'unseen', 'acted'] as const).map((outcome) =>
      warningBecame({ ...plain, outcome }, 'reversal'),
    );
    expect(all).toEqual([
      'open',
      'a repeat',
      'too late',
      'did not come true',
      'could not be seen: a gap in the span',
      'acted on',
    ]);
  });

  it('say what a switch was and whether it was warned', () => {
    expect(switchText(event, 'reversal')).toBe('reversal, upward; sure 2.4 s later');
    expect(switchText({ ...event, from: 1, to: 0, confirmedAt: event.at }, 'hop')).toBe('hop, downward');
    expect(switchBecame(event)).toBe('warned 8 s before');
    expect(switchBecame({ ...event, outcome: 'missed', lead: null })).toBe('missed: no warning');
    expect(switchBecame({ ...event, outcome: 'pending', lead: null })).toBe('not known yet');
  });

  it('give times of day and elapsed time apart, and spans in a fitting unit', () => {
    expect(clockText(T0 + 0.3)).toBe('12:00:00.3');
    expect(clockText(3723.4)).toBe('1:02:03.4 elapsed');
    expect([0.244, 16, 119, 210, 36_000].map(spanText)).toEqual([
      '0.24 s',
      '16 s',
      '119 s',
      '3.5 min',
      '10 h',
    ]);
  });
});

describe('a page of the logbook', () => {
  const kept = Array.from({ length: 30 }, (_, i) =>
    row('log', 30 - i, T0 - i, { kind: 'note', channel: null, watch: null, by: null, text: `note ${i}` }),
  );
  const store = {
    logbook: async ({ after, most }: LogbookQuery) => {
      const begin = after === undefined ? 0 : kept.findIndex(({ id }) => id === after.id) + 1;
      return kept.slice(begin, begin + most);
    },
  };

  it('says where the next begins until there is none', async () => {
    const first = await logbookPage(store, watches, {}, null, 20);
    expect(first.entries).toHaveLength(20);
    const second = await logbookPage(store, watches, {}, first.next, 20);
    expect(second.entries.map(({ text }) => text)).toEqual(
      Array.from({ length: 10 }, (_, i) => `note ${20 + i}`),
    );
    expect(second.next).toBeNull();
  });

  it('finds a text in the words, without regard to case', async () => {
    const { entries, next } = await logbookPage(store, watches, { text: 'NOTE 2' }, null, 20);
    expect(entries).toHaveLength(11);
    expect(next).toBeNull();
  });

  it('knows a cursor from what is none', () => {
    expect(placeOf(`log 7 ${T0 + 0.1}`)).toEqual({ source: 'log', id: 7, time: T0 + 0.1 });
    for (const bad of ['', 'log', 'log 7', 'logs 7 1', 'log x 1', 'log 7 x', 'log 7 1 2', 'log 1.5 1'])
      expect(placeOf(bad)).toBeNull();
  });

  it('says of an open warning that nobody has acknowledged that it waits for a person', () => {
    const open = { ...warning, outcome: 'open', acknowledgedAt: null };
    expect(entryOf(row('warning', 4, T0, open), watches)).toMatchObject({
      key: 'warning 4',
      waits: true,
      warning: { id: 4 },
    });
    expect(entryOf(row('warning', 4, T0, { ...open, quiet: true }), watches).waits).toBe(false);
    expect(entryOf(row('warning', 4, T0, warning), watches).waits).toBe(false);
  });
});

describe('the times of warnings', () => {
  const now = T0 + 100;

  it('are those of the last 30 days, oldest first, with who was called and how long each stood', async () => {
    const rows = [
      row('warning', 3, T0 + 50, { ...warning, at: T0 + 50, madeAt: T0 + 50, outcome: 'open' }),
      row('warning', 2, T0 + 20, {
        ...warning,
        madeAt: T0 + 20,
        quiet: true,
        outcome: 'false',
        switchAt: null,
      }),
      row('warning', 1, T0, warning),
    ];
    const store = {
      logbook: async ({ kinds }: LogbookQuery) =>
        kinds === undefined ? [row('log', 1, T0 - 300, {})] : rows,
    };
    expect(await warningTimes(store, watches, now)).toEqual({
      since: T0 - 300,
      now,
      watches: ['w'],
      watch: [0, 0, 0],
      madeAt: [T0 + 0.2, T0 + 20, T0 + 50],
      called: [true, false, true],
      acknowledgedAt: [T0 + 2, T0 + 2, T0 + 2],
      stood: [8, 10, null],
      cut: false,
    });
  });
});

describe('the logbook as CSV (RFC 4180)', () => {
  it('ends every record with CRLF and gives each as many fields as the header', () => {
    const record = logbookRecord(entryOf(row('warning', 1, T0, warning), watches));
    expect(LOGBOOK_HEADER.endsWith('\r\n')).toBe(true);
    expect(record.endsWith('\r\n')).toBe(true);
    expect(record).toContain(',2023-11-15T12:00:00.000Z,warning,Loop A,Loop A,');
    expect(fieldsOf(record)).toHaveLength(fieldsOf(LOGBOOK_HEADER).length);
  });

  it('quotes what holds a comma, a quote or a line break, and doubles quotes', () => {
    const text = 'touched "it", then\nleft\r\nagain';
    const note = { kind: 'note', channel: null, watch: null, by: null, text };
    const record = logbookRecord(entryOf(row('log', 1, T0, note), watches));
    expect(record).toContain('"touched ""it"", then\nleft\r\nagain"');
    expect(fieldsOf(record)[fieldsOf(LOGBOOK_HEADER).indexOf('text')]).toBe(text);
  });

  it('leaves the time of day empty for elapsed time', () => {
    const record = fieldsOf(logbookRecord(entryOf(row('switch', 1, 12.5, event), watches)));
    expect(record.slice(0, 3)).toEqual(['12.5', '', 'switch']);
  });

  /** One record's fields, read by the grammar of RFC 4180, section 2. */
  function fieldsOf(record: string): string[] {
    const fields: string[] = [];
    const body = record.slice(0, -2);
    for (let i = 0; i <= body.length; i++) {
      let field = '';
      if (body[i] === '"') {
        for (i++; !(body[i] === '"' && body[i + 1] !== '"'); i++) {
          if (body[i] === '"') i++;
          field += body[i];
        }
        i++;
      } else for (; i < body.length && body[i] !== ','; i++) field += body[i];
      fields.push(field);
    }
    return fields;
  }
});
