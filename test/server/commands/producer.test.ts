import { once } from 'node:events';
import type { AddressInfo } from 'node:net';
import { Decoder } from 'cbor-x';
import { afterEach, expect, it } from 'vitest';
import { type WebSocket, WebSocketServer } from 'ws';
import { createProducer, type Producer, type ProducerState } from '../../../server/commands/producer.ts';
import { createAccess } from '../../../server/gateway/access/access.ts';
import { createToken } from '../../../server/gateway/access/accessTokens.ts';
import { serve, until } from '../gateway/harness.ts';
import { temporaryFolder } from '../store/temporaryFolder.ts';

const decoder = new Decoder({ mapsAsObjects: true, useRecords: false });
const WINDOW = 4;

let server: WebSocketServer | null = null;
let producer: Producer | null = null;
afterEach(async () => {
  await producer?.close();
  server?.close();
});

/** A server that says where the run stands and a window, and otherwise what the test says. */
async function stand(resume: () => number) {
  const heard: number[][] = [];
  const sockets: WebSocket[] = [];
  server = new WebSocketServer({ port: 0, host: '127.0.0.1' });
  await once(server, 'listening');
  server.on('connection', (socket) => {
    const seqs: number[] = [];
    heard.push(seqs);
    sockets.push(socket);
    socket.on('message', (data: Buffer, binary) => {
      if (binary) seqs.push((decoder.decode(data) as { seq: number }).seq);
      else
        for (const reply of [{ resume: resume(), channel: 'c' }, { window: WINDOW }])
          socket.send(JSON.stringify(reply));
    });
  });
  const states: ProducerState[] = [];
  producer = createProducer({
    to: `ws://127.0.0.1:${(server.address() as AddressInfo).port}`,
    run: 'r',
    channels: [{ channel: 'c' }],
    onState: (state) => states.push(state),
    limit: 8,
  });
  return { heard, states, say: (reply: object) => sockets.at(-1)!.send(JSON.stringify(reply)) };
}

const send = (count: number) => {
  for (let i = 0; i < count; i++) producer!.send('c', { t0: i, dt: 1, values: Float64Array.of(i) });
};

it('never has more under way than the window, also when it gives up the oldest of what waits', async () => {
  const { heard, states, say } = await stand(() => 0);
  send(20);
  await until(() => heard[0]?.length === WINDOW);
  send(20);
  await new Promise((resolve) => setTimeout(resolve, 50));
  expect(heard).toEqual([[12, 13, 14, 15]]);
  expect(states.filter(({ kind }) => kind === 'dropped').length).toBeGreaterThan(20);
  say({ ack: 15, channel: 'c' });
  await until(() => heard[0]!.length === 2 * WINDOW);
  // the oldest of what waited is gone: the server records a hole
  expect(heard[0]!.slice(WINDOW)).toEqual([36, 37, 38, 39]);
});

it('connects anew when the server has too many, and goes on where the server stands', async () => {
  let stands = 0;
  const { heard, say } = await stand(() => stands);
  send(6);
  await until(() => heard[0]?.length === WINDOW);
  stands = 2;
  say({ error: 'too many', code: 'TOO_MANY_UNACKNOWLEDGED', channel: 'c', seq: 2 });
  await until(() => heard[1]?.length === WINDOW);
  expect(heard[1]).toEqual([2, 3, 4, 5]);
});

it('shows its token, and ends with the server’s own sentence when it is not let in', async () => {
  const folder = temporaryFolder();
  const token = createToken(folder, { name: 'rig', role: 'producer', channels: null }, new Date());
  const access = createAccess({
    folder,
    now: () => Date.now() / 1000,
    secure: false,
    warn: expect.unreachable,
  });
  const { hub, port } = await serve(folder, {}, { access });
  const open = (shown: string | null) =>
    createProducer({
      to: `ws://127.0.0.1:${port}/ingest`,
      run: 'r',
      channels: [{ channel: 'c' }],
      token: shown,
    });
  producer = open(token);
  producer.send('c', { t0: 0, dt: 1, values: Float64Array.of(1, 2) });
  await producer.idle();
  expect(hub.channels.samples('c')).toBe(2);
  for (const [shown, said] of [
    [null, /refused this producer: this server asks for a token/],
    ['another', /refused this producer: there is no such token here/],
  ] as const) {
    const refused = open(shown);
    refused.send('c', { t0: 9, dt: 1, values: Float64Array.of(1) });
    await expect(refused.idle()).rejects.toThrow(said);
    await refused.close();
  }
});

it('answers a trial with the next frame of its channel, once', async () => {
  server = new WebSocketServer({ port: 0, host: '127.0.0.1' });
  await once(server, 'listening');
  const frames: Record<string, unknown>[] = [];
  server.on('connection', (socket) =>
    socket.on('message', (data: Buffer, binary) => {
      if (binary) {
        const frame = decoder.decode(data) as Record<string, unknown>;
        frames.push(frame);
        socket.send(JSON.stringify({ ack: frame.seq, channel: frame.channel }));
      } else
        for (const reply of [{ window: WINDOW }, { trial: 'x', channel: 'c' }])
          socket.send(JSON.stringify(reply));
    }),
  );
  const states: ProducerState[] = [];
  producer = createProducer({
    to: `ws://127.0.0.1:${(server.address() as AddressInfo).port}/ingest`,
    run: 'r',
    channels: [{ channel: 'c' }, { channel: 'd' }],
    clock: () => 12.5,
    onState: (state) => states.push(state),
  });
  await until(() => states.some(({ kind }) => kind === 'connected'));
  await new Promise((resolve) => setTimeout(resolve, 50));
  const values = Float64Array.of(1);
  producer.send('d', { t0: 12, dt: 1, values });
  producer.send('c', { t0: 12, dt: 1, values });
  producer.send('c', { t0: 13, dt: 1, values });
  await producer.idle();
  expect(frames.map(({ channel, seq, trial, sentAt }) => [channel, seq, trial, sentAt])).toEqual([
    ['d', 0, undefined, undefined],
    ['c', 0, 'x', 12.5],
    ['c', 1, undefined, undefined],
  ]);
  expect(states.map(({ kind }) => kind)).not.toContain('refused');
});
