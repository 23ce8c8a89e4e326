import { Encoder } from 'cbor-x';
import { describe, expect, it } from 'vitest';
import type { IngestReply } from '../../shared-types/ingest.ts';
import { api, connect, type Line, serve, swing, swingModelJson, until } from '../server/gateway/harness.ts';
import { temporaryFolder } from '../server/store/temporaryFolder.ts';

const encoder = new Encoder({ useRecords: false });
const acknowledged = (seq: number) => (reply: IngestReply) => 'ack' in reply && reply.ack >= seq;
const refusedAs = (code: string) => (reply: IngestReply) => 'error' in reply && reply.code === code;

async function hello(port: number, run = 'r'): Promise<Line> {
  const line = await connect(port);
  line.say({ hello: 1, run, channels: [{ channel: 'c', unit: 'V', interval: 0.1, low: -5, high: 5 }] });
  await line.heard((reply) => 'window' in reply);
  return line;
}

const good = (line: Line, seq: number) =>
  line.say({ channel: 'c', seq, t0: seq, dt: 0.1, values: [...swing(10 * seq, 10)] });

async function storedValues(port: number): Promise<string[]> {
  const response = await fetch(`http://127.0.0.1:${port}/api/channels/c/samples.csv`);
  return (await response.text()).trim().split('\n').slice(1);
}

describe('bad input from a producer', () => {
  it('is answered in words each time, and every good sample around it is kept', async () => {
    const { port } = await serve(temporaryFolder());
    const line = await hello(port);
    good(line, 0);
    const bad: [string, object | string | Uint8Array][] = [
      ['NOT_JSON', '{"channel": "c", '],
      ['NOT_CBOR', Uint8Array.of(0xbf, 0x61, 0x63)],
      ['NOT_A_FRAME', { channel: 7, seq: 1, values: [1] }],
      ['BAD_VALUES', { channel: 'c', seq: 1, t0: 1, dt: 0.1, values: [1, 'two'] }],
      ['BAD_TIMES', { channel: 'c', seq: 2, t: [2, 1.9], values: [1, 2] }],
      ['TIME_BACKWARDS', { channel: 'c', seq: 3, t0: 0.5, dt: 0.1, values: [1] }],
      ['NO_SUCH_CHANNEL', { channel: 'unheard of', seq: 0, t0: 1, dt: 0.1, values: [1] }],
      ['NO_SEQ', { channel: 'c', t0: 1, dt: 0.1, values: [1] }],
      ['OTHER_CONTENT', { channel: 'c', seq: 0, t0: 0, dt: 0.1, values: [1] }],
      ['BAD_HELLO', { hello: 1, run: 'again', channels: [{ channel: 'c' }] }],
    ];
    for (const [code, message] of bad) {
      line.say(message);
      const reply = await line.heard(refusedAs(code));
      expect('error' in reply && reply.error.length, code).toBeGreaterThan(20);
    }
    good(line, 4);
    await line.heard(acknowledged(4));
    expect(await storedValues(port)).toHaveLength(20);
    const { json } = await api(port, '/api/channels');
    expect(json).toMatchObject([{ channel: 'c', samples: 20, holes: 0, connected: true }]);
    expect(json).toMatchObject([{ refused: 5 }]);
    expect((await api(port, '/health')).status).toBe(200);
  });

  it('takes frames again and skips as what they are: nothing, and a recorded hole', async () => {
    const { port } = await serve(temporaryFolder());
    const line = await hello(port);
    for (const seq of [0, 0, 1, 1, 4]) good(line, seq);
    await line.heard(acknowledged(4));
    expect(await storedValues(port)).toHaveLength(30);
    expect((await api(port, '/api/channels')).json).toMatchObject([{ samples: 30, holes: 2 }]);
    const { json } = await api(port, '/api/log');
    expect(json.map(({ text }) => text)).toContain('the producer skipped frames 2 to 3');
  });

  it('takes NaN and null for gaps', async () => {
    const { port } = await serve(temporaryFolder());
    const line = await hello(port);
    line.say({ channel: 'c', seq: 0, t0: 0, dt: 0.1, values: [1, null, 3] });
    line.say(
      encoder.encode({ channel: 'c', seq: 1, t0: 0.3, dt: 0.1, values: Float64Array.of(Number.NaN, 5) }),
    );
    await line.heard(acknowledged(1));
    const values = (await storedValues(port)).map((row) => row.split(',')[1]);
    expect(values).toEqual(['1', '', '3', '', '5']);
    expect((await api(port, '/api/channels')).json).toMatchObject([{ gaps: 2, value: 5 }]);
  });

  it('refuses a frame of a million samples in words and goes on', async () => {
    const { port } = await serve(temporaryFolder());
    const line = await hello(port);
    const values = new Float64Array(1_000_000);
    line.say(encoder.encode({ channel: 'c', seq: 0, t0: 0, dt: 1e-6, values }));
    expect(await line.heard(refusedAs('TOO_LARGE'))).toMatchObject({ channel: 'c', seq: 0 });
    line.say(JSON.stringify({ channel: 'c', seq: 1, t0: 0, dt: 1e-6, values: [...values] }));
    await line.heard((reply) => 'error' in reply && reply.code === 'TOO_LARGE' && reply.seq === 1);
    good(line, 2);
    await line.heard(acknowledged(2));
    expect(await storedValues(port)).toHaveLength(10);
  });

  it('ends a connection whose message is beyond all measure with 1009, and serves the next', async () => {
    const { port } = await serve(temporaryFolder());
    const line = await hello(port);
    line.say(new Uint8Array(65 * 1024 * 1024));
    expect((await line.closed).code).toBe(1009);
    const next = await hello(port);
    good(next, 0);
    await next.heard(acknowledged(0));
  });

  it('tells a second producer of a channel that it is in use, until the first falls silent', async () => {
    const { port } = await serve(temporaryFolder());
    const first = await hello(port);
    good(first, 0);
    await first.heard(acknowledged(0));
    const second = await connect(port);
    second.say({ hello: 1, run: 'other', channels: [{ channel: 'c' }] });
    await second.heard(refusedAs('CHANNEL_IN_USE'));
    expect((await second.closed).code).toBe(1013);
    await until(async () => (await api(port, '/api/channels')).json[0]!.silent === true);
    const third = await hello(port, 'other');
    expect((await first.closed).code).toBe(4001);
    third.say({ channel: 'c', seq: 0, t0: 50, dt: 0.1, values: [1] });
    await third.heard(acknowledged(0));
  });
});

describe('bad input over HTTP', () => {
  it('is answered with problem details (RFC 9457)', async () => {
    const { port } = await serve(temporaryFolder());
    const asks: [number, string, RequestInit?][] = [
      [404, '/nowhere'],
      [404, '/api/channels/none/columns'],
      [404, '/api/models/none'],
      [404, '/api/watches/none/actions', { method: 'POST', body: '{"action":"unshelve"}' }],
      [400, '/api/watches', { method: 'POST', body: '{' }],
      [400, '/api/watches', { method: 'POST', body: '{"model":7}' }],
      [404, '/api/watches', { method: 'POST', body: '{"model":"none","channels":["c"]}' }],
      [400, '/api/models', { method: 'POST', body: 'no model' }],
      [400, '/api/warnings?after=soon'],
      [413, '/api/watches', { method: 'POST', body: `{"model":"${'x'.repeat(2_000_000)}"}` }],
      [403, '/api/watches', { method: 'POST', body: '{}', headers: { origin: 'http://elsewhere.example' } }],
    ];
    for (const [status, path, init] of asks) {
      const response = await fetch(`http://127.0.0.1:${port}${path}`, init);
      const told = `${init?.method ?? 'GET'} ${path}`;
      expect(response.status, told).toBe(status);
      expect(response.headers.get('content-type'), told).toContain('application/problem+json');
      const problem = (await response.json()) as { status: number; detail: string; title: string };
      expect(problem.status, told).toBe(status);
      expect(problem.detail.length, told).toBeGreaterThan(10);
    }
  });

  it('refuses a model file of a newer version in a sentence and keeps the others', async () => {
    const { port } = await serve(temporaryFolder());
    const post = (body: string) => fetch(`http://127.0.0.1:${port}/api/models`, { method: 'POST', body });
    expect((await post(swingModelJson())).status).toBe(201);
    const newer = JSON.parse(swingModelJson());
    for (const key of Object.keys(newer)) if (/version/i.test(key)) newer[key] = 1000;
    const refused = await post(JSON.stringify(newer));
    expect(refused.status).toBe(400);
    expect(await refused.json()).toMatchObject({ code: 'MODEL_NEWER' });
    expect((await api(port, '/api/models')).json.map(({ name }) => name)).toEqual(['swing']);
  });
});
