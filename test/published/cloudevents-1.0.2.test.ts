// CloudEvents, version 1.0.2 (Cloud Native Computing Foundation): "Context Attributes" (required: id, source,
// specversion, type; names of lower-case letters and digits; id, source and type not empty; time by RFC 3339;
// datacontenttype by RFC 2046), "JSON Event Format" 3.1, "HTTP Protocol Binding" 3.2 (structured content mode), and the
// documented extension "Expiry Time" (expirytime, RFC 3339, later than time).
import { describe, expect, it } from 'vitest';
import {
  CLOUD_EVENTS_JSON,
  type CloudEvent,
  sourceOf,
  trialEvent,
  warningEvent,
} from '../../server/gateway/delivery/cloudEvent.ts';
import type { Warning } from '../../shared-types/warning.ts';

/** Seconds of an RFC 3339 time (section 5.6, date-time); it must be one. */
function parsedTime(text: unknown): number {
  expect(text).toEqual(expect.stringMatching(/^\d{4}-\d\d-\d\dT\d\d:\d\d:\d\d(\.\d+)?(Z|[+-]\d\d:\d\d)$/));
  return Date.parse(String(text)) / 1000;
}

const SOURCE = sourceOf('bench pc’s');
const watch = { watch: 'loop-a', name: 'Loop A', switchWord: 'reversal' };
const warning = {
  id: 7,
  watch: 'loop-a',
  channels: ['dT'],
  at: 1_796_100_000.25,
  from: 1_796_100_010.25,
  to: 1_796_100_020.25,
  madeAt: 1_796_100_000.5,
  outcome: 'open',
} as Warning;

const events: [string, CloudEvent][] = [
  ['a warning issued', warningEvent(warning, 'issued', watch, SOURCE, warning.madeAt, 1_796_100_020.25)],
  [
    'what became of a warning',
    warningEvent({ ...warning, outcome: 'true' }, 'graded', watch, SOURCE, 1_796_100_020, 1_796_186_420),
  ],
  ['a trial', trialEvent('t1', watch, ['dT'], SOURCE, 1_796_100_000, 1_796_100_010)],
];

describe.each(events)('%s, as a CloudEvent of version 1.0.2', (_, event) => {
  const sent = JSON.parse(JSON.stringify(event)) as Record<string, unknown>;

  it('has the four required attributes, none of them empty', () => {
    expect(sent.specversion).toBe('1.0');
    for (const name of ['id', 'source', 'type'])
      expect(sent[name], name).toEqual(expect.stringMatching(/^.+$/));
  });

  it('has attribute names of lower-case letters and digits alone, at most twenty of them', () => {
    for (const name of Object.keys(sent)) expect(name).toMatch(/^[a-z0-9]{1,20}$/);
  });

  it('has a source that is a URI reference', () => {
    expect(new URL(String(sent.source), 'https://example.com/').href).toContain('foreshift');
    expect(String(sent.source)).not.toMatch(/[\s"<>\\^`{|}]/);
  });

  it('has times by RFC 3339, and is of use for longer than it takes to be made', () => {
    expect(parsedTime(sent.expirytime)).toBeGreaterThan(parsedTime(sent.time));
  });

  it('carries JSON, of a media type in the binding’s own words', () => {
    expect(sent.datacontenttype).toBe('application/json');
    expect(typeof sent.data).toBe('object');
    expect(sent).not.toHaveProperty('data_base64');
    expect(CLOUD_EVENTS_JSON).toMatch(/^application\/cloudevents\+json(; charset=utf-8)?$/);
  });
});

describe('the events of one warning', () => {
  it('have ids that differ by what is told and nothing else, and not by the number the store gave it', () => {
    const again = warningEvent({ ...warning, id: 8 }, 'issued', watch, SOURCE, 1, 2);
    expect(again.id).toBe(events[0]![1].id);
    expect(new Set(events.map(([, { id }]) => id)).size).toBe(3);
    expect(warningEvent({ ...warning, at: warning.at + 0.1 }, 'issued', watch, SOURCE, 1, 2).id).not.toBe(
      events[0]![1].id,
    );
  });
});
