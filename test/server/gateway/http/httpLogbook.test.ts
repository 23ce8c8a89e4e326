import { describe, expect, it } from 'vitest';
import { WebSocket } from 'ws';
import { modelToJson } from '../../../../server/model/modelFile.ts';
import { FEED_PROTOCOL } from '../../../../shared-types/feed.ts';
import type { LogbookPage, WarningTimes } from '../../../../shared-types/logbook.ts';
import type { SwitchCard } from '../../../../shared-types/rehearsal.ts';
import type { LogEntry, SwitchEvent } from '../../../../shared-types/warning.ts';
import { temporaryFolder } from '../../store/temporaryFolder.ts';
import { api, connect, serve, swing, swingModel, until } from '../harness.ts';

/**
 * A server whose watch "swing" has warned of a switch of channel "c", ten seconds of elapsed time in all: −2 cos(t/2)
 * rises through −1 at 2.094 s and through 0 at π, so the warning is at 2.1 s and the switch at 3.2 s, the first sample
 * beyond the crossing.
 */
async function switched(model = swingModel()) {
  const { port } = await serve(temporaryFolder());
  await fetch(`http://127.0.0.1:${port}/api/models`, { method: 'POST', body: modelToJson(model) });
  await api(port, '/api/watches', { name: 'Swing', model: model.name, channels: ['c'], reaction: 0 });
  const line = await connect(port);
  line.say({ hello: 1, run: 'r', channels: [{ channel: 'c', interval: 0.1, unit: 'V' }] });
  await line.heard((reply) => 'window' in reply);
  for (let seq = 0; seq < 20; seq++)
    line.say({ channel: 'c', seq, t0: seq / 2, dt: 0.1, values: [...swing(5 * seq, 5)] });
  await line.heard((reply) => 'ack' in reply && reply.ack === 19);
  await until(async () => (await api<SwitchEvent[]>(port, '/api/switches')).json.length === 1);
  return port;
}

const logbook = (port: number, query = '') => api<LogbookPage>(port, `/api/logbook${query}`);
const fetched = async (port: number, path: string) => {
  const response = await fetch(`http://127.0.0.1:${port}${path}`);
  return { response, body: await response.text() };
};

describe('the logbook over HTTP', () => {
  it('gives warnings, switches and the log in words, by filter', async () => {
    const port = await switched();
    const { entries, next } = (await logbook(port)).json;
    expect(next).toBeNull();
    expect(entries.map(({ kind }) => kind)).toEqual(
      expect.arrayContaining(['server', 'model', 'watch', 'warning', 'switch']),
    );
    const warning = entries.find(({ kind }) => kind === 'warning')!;
    expect(warning).toMatchObject({ channel: 'c', name: 'Swing', became: 'came true: swing after 1.1 s' });
    // elapsed time has no place among times of day: the server's clock orders these lines
    expect(warning.time).toBeGreaterThan(1e8);
    expect(warning.at).toBeCloseTo(2.1, 6);

    const kinds = async (query: string) => (await logbook(port, query)).json.entries.map(({ kind }) => kind);
    expect(await kinds('?kind=switch&kind=model')).toEqual(['switch', 'model']);
    expect(await kinds('?channel=c&kind=warning')).toEqual(['warning']);
    expect(await kinds('?channel=d')).toEqual([]);
    expect(await kinds('?text=CAME%20true')).toEqual(['warning']);
    expect(await kinds(`?key=${encodeURIComponent(warning.key)}`)).toEqual(['warning']);
    expect(await kinds('?to=2001-01-01T00:00:00Z')).toEqual([]);
    const first = (await logbook(port, '?most=2')).json;
    const rest = (await logbook(port, `?before=${encodeURIComponent(first.next!)}`)).json;
    expect([...first.entries, ...rest.entries]).toEqual(entries);
  });

  it('refuses filters that cannot be meant, in a sentence', async () => {
    const { port } = await serve(temporaryFolder());
    for (const query of ['before=x', 'from=soon', 'from=5&to=4', 'key=warning', `key=log%201.5`]) {
      const { status, json } = await api<{ detail: string; code: string }>(port, `/api/logbook?${query}`);
      expect(status, query).toBe(400);
      expect(json.code).toBe('BAD_QUERY');
      expect(json.detail).toMatch(/; (give|swap|ask)/);
    }
  });

  it('gives the whole log as CSV and as JSON, by the same filters', async () => {
    const port = await switched();
    const whole = (await logbook(port)).json.entries;
    const csv = await fetched(port, '/api/log.csv');
    expect(csv.response.headers.get('content-type')).toMatch(/^text\/csv/);
    expect(csv.response.headers.get('content-disposition')).toBe(
      'attachment; filename=foreshift-logbook.csv',
    );
    expect(csv.body.split('\r\n')).toHaveLength(whole.length + 2);
    const json = await fetched(port, '/api/log.json');
    expect(JSON.parse(json.body)).toEqual(whole);
    expect((await fetched(port, '/api/log.csv?kind=switch')).body.split('\r\n')).toHaveLength(3);
    expect(JSON.parse((await fetched(port, '/api/log.json?channel=none')).body)).toEqual([]);
  });

  it('gives what the figures are made of', async () => {
    const port = await switched();
    const times = (await api<WarningTimes>(port, '/api/logbook/warnings')).json;
    expect(times).toMatchObject({ watches: ['swing'], watch: [0], called: [true], cut: false });
    expect(times.stood[0]).toBeCloseTo(1.1, 6);
    expect(times.madeAt[0]).toBeGreaterThanOrEqual(times.since);
    expect(times.since).toBeLessThanOrEqual(times.now);
  });
});

describe('a note', () => {
  it('is on disk when it is answered, and told to the pages', async () => {
    const port = await switched();
    const told: string[] = [];
    const page = new WebSocket(`ws://127.0.0.1:${port}/feed`, FEED_PROTOCOL);
    page.on('message', (data: Buffer) => told.push(data.toString('latin1')));
    await new Promise((resolve) => page.once('message', resolve));
    const note = { channel: 'c', text: '  trimmed the heater ', by: 'A. Person' };
    const { status, json } = await api<LogEntry>(port, '/api/notes', note);
    expect(status).toBe(201);
    expect(json).toMatchObject({ kind: 'note', channel: 'c', text: 'trimmed the heater', by: 'A. Person' });
    expect((await logbook(port, '?kind=note')).json.entries).toMatchObject([
      { key: `log ${json.id}`, text: 'trimmed the heater', by: 'A. Person', channel: 'c' },
    ]);
    await until(() => told.some((message) => message.includes('trimmed the heater')));
    page.terminate();
  });

  it('needs words, and a channel that is there if it names one', async () => {
    const { port } = await serve(temporaryFolder());
    const post = async (body: unknown) => (await api<{ code: string }>(port, '/api/notes', body)).json.code;
    expect(await post({ text: '   ' })).toBe('BAD_REQUEST');
    expect(await post({})).toBe('BAD_REQUEST');
    expect(await post({ text: 'x'.repeat(2001) })).toBe('BAD_REQUEST');
    expect(await post({ text: 'x', channel: 'nowhere' })).toBe('NO_SUCH_CHANNEL');
    expect((await api<LogEntry>(port, '/api/notes', { text: 'of no channel' })).status).toBe(201);
  });
});

describe('the card of a switch', () => {
  it('has the last moments before it, and says that a model without a rehearsal knows no cost', async () => {
    const port = await switched();
    const { json: card } = await api<SwitchCard>(port, '/api/switches/1/card');
    expect(card).toMatchObject({
      channel: 'c',
      outcome: 'warned',
      leastLead: 0.5,
      horizon: 3,
      threshold: -1,
    });
    expect(card.warnedAt).toBeCloseTo(2.1, 6);
    expect(card.lead).toBeCloseTo(1.1, 6);
    expect(card.at).toBeCloseTo(3.2, 6);
    expect(card.t.length).toBe(card.signal.length);
    const near = [...card.t].findIndex((time) => time > 2.05);
    expect(card.signal[near]!).toBeCloseTo(-2 * Math.cos(2.1 / 2), 6);
    expect(card.catching).toBeNull();
    expect(card.notKnown).toMatch(/model "swing" carries no table of other thresholds/);
  });

  it('names the strictest threshold that would have caught it, with its cost, from the model’s own table', async () => {
    const point = { rearm: -1.4, detection: 0.9, cameTrue: 0.7 };
    const port = await switched({
      ...swingModel(),
      operating: [
        { ...point, threshold: -1.2, falsePerHour: 3 },
        { ...point, threshold: -0.8, falsePerHour: 2 },
        { ...point, threshold: 1.4, falsePerHour: 1 },
      ],
    });
    const { json: card } = await api<SwitchCard>(port, '/api/switches/1/card');
    // −2 cos(t/2) is −0.8 at 2.319 s, 0.8 s before the switch; 1.4 is reached after it
    expect(card.catching).toEqual({ threshold: -0.8, falsePerHour: 2, cameTrue: 0.7 });
    expect(card.notKnown).toBeNull();
  });

  it('leaves out what is marked, as the watch does', async () => {
    const port = await switched();
    await api(port, '/api/marks', { channel: 'c', from: 1, to: 2, why: 'touched' });
    const { json: card } = await api<SwitchCard>(port, '/api/switches/1/card');
    const within = [...card.t].flatMap((time, i) => (time >= 1.05 && time <= 1.95 ? [card.signal[i]] : []));
    expect(within.every((value) => value === null)).toBe(true);
  });

  it('is refused in a sentence where there is no such switch', async () => {
    const port = await switched();
    for (const [id, code] of [
      ['2', 'NO_SUCH_SWITCH'],
      ['x', 'NOT_THERE'],
    ])
      expect((await api<{ code: string }>(port, `/api/switches/${id}/card`)).json.code).toBe(code);
  });
});
