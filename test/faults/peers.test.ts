/** Producers and pages that read slowly or not at all, vanish without a word, or come back all at once. */
import { once } from 'node:events';
import { afterEach, expect, it } from 'vitest';
import { WebSocket } from 'ws';
import { openStore } from '../../server/store/openStore.ts';
import type { ChannelState } from '../../shared-types/channel.ts';
import { FEED_PROTOCOL } from '../../shared-types/feed.ts';
import { INGEST_PROTOCOL, type IngestReply } from '../../shared-types/ingest.ts';
import { api, connect, serve, until } from '../server/gateway/harness.ts';
import { temporaryFolder } from '../server/store/temporaryFolder.ts';
import { createRelay, type Relay } from './relay.ts';
import { chance, missingAndTwice, report, WHOLE } from './report.ts';

const relays: Relay[] = [];
const sockets: WebSocket[] = [];
afterEach(async () => {
  for (const socket of sockets.splice(0)) socket.terminate();
  for (const relay of relays.splice(0)) await relay.close();
});

async function open(port: number, path: string, protocol: string): Promise<WebSocket> {
  const socket = new WebSocket(`ws://127.0.0.1:${port}${path}`, protocol, { perMessageDeflate: false });
  sockets.push(socket);
  socket.on('error', () => {});
  await once(socket, 'open');
  return socket;
}

/** What became of samples that count from 0: how many are missing and how many are there again. */
async function found(folder: string, channel: string, sent: number) {
  const store = openStore(folder, { commitEvery: 0.01 });
  const { values } = await store.samplesFrom(channel, 0, 1e9);
  await store.close();
  return missingAndTwice(values, sent);
}

const quantile = (values: number[], p: number) =>
  [...values].sort((a, b) => a - b)[Math.min(values.length - 1, Math.floor(p * values.length))]!;

it('pages that never read hold up neither ingest nor each other, and take no memory beyond their limit', async () => {
  const folder = temporaryFolder();
  const server = await serve(folder);
  const pages = await Promise.all(Array.from({ length: 8 }, () => open(server.port, '/feed', FEED_PROTOCOL)));
  for (const page of pages) {
    page.send(JSON.stringify({ look: { seconds: 3600, columns: 20_000 } }));
    page.pause();
  }
  const line = await connect(server.port);
  line.say({ hello: 1, run: 'r', channels: [{ channel: 'c' }] });
  await line.heard((reply) => 'window' in reply);
  const frames = WHOLE ? 20_000 : 500;
  const delays: number[] = [];
  global.gc?.();
  const before = process.memoryUsage().rss;
  for (let seq = 0; seq < frames; seq++) {
    const began = performance.now();
    const values = Array.from({ length: 100 }, (_, i) => seq * 100 + i);
    line.say({ channel: 'c', seq, t0: seq, dt: 0.01, values });
    await line.heard((reply) => 'ack' in reply && reply.ack >= seq);
    delays.push(performance.now() - began);
    line.replies.length = 0;
  }
  const grown = process.memoryUsage().rss - before;
  await server.close();
  const cost = await found(folder, 'c', frames * 100);
  report({
    tried: `${pages.length} pages that never read`,
    acknowledged: frames * 100,
    ...cost,
    'ms to an ack, median': quantile(delays, 0.5).toFixed(1),
    'ms to an ack, 99 %': quantile(delays, 0.99).toFixed(1),
    'MB grown': (grown / 1e6).toFixed(0),
  });
  expect(cost).toEqual({ lost: 0, twice: 0 });
  expect(quantile(delays, 0.99)).toBeLessThan(500);
  expect(grown).toBeLessThan(400e6);
}, 600_000);

it('a producer that never reads its acknowledgements is hung up on before they fill the memory', async () => {
  const folder = temporaryFolder();
  const server = await serve(folder, { ingestWindow: 100_000, fastestFrames: 1_000_000 });
  const socket = await open(server.port, '/ingest', INGEST_PROTOCOL);
  const names = Array.from(
    { length: 200 },
    (_, i) => `a channel with a long name to fill its acknowledgements ${i}`,
  );
  socket.send(JSON.stringify({ hello: 1, run: 'r', channels: names.map((channel) => ({ channel })) }));
  await once(socket, 'message');
  socket.pause();
  let closed = false;
  socket.on('close', () => {
    closed = true;
  });
  let seq = 0;
  const isGone = async () => !(await api<ChannelState[]>(server.port, '/api/channels')).json[0]!.connected;
  const began = performance.now();
  while (!closed && performance.now() - began < 100_000) {
    for (const channel of names) socket.send(JSON.stringify({ channel, seq, t0: seq, dt: 1, values: [seq] }));
    seq++;
    await new Promise((resolve) => setTimeout(resolve, 12));
    if (seq % 50 === 0 && (await isGone())) break;
  }
  expect(await isGone()).toBe(true);
  // what was consumed is there, once each
  await server.close();
  const store = openStore(folder, { commitEvery: 0.01 });
  const { values } = await store.samplesFrom(names[0]!, 0, 1e9);
  const { next } = await store.run(names[0]!, 'r');
  await store.close();
  const cost = missingAndTwice(values, next);
  report({ tried: 'a producer that never reads', acknowledged: next, ...cost, 'frames sent': seq });
  expect(cost).toEqual({ lost: 0, twice: 0 });
}, 150_000);

it('a producer whose cable is pulled comes back at once under its run, and loses nothing', async () => {
  const folder = temporaryFolder();
  const server = await serve(folder);
  const relay = await createRelay(server.port);
  relays.push(relay);
  const line = await connect(relay.port);
  const hello = { hello: 1, run: 'r', channels: [{ channel: 'c' }] };
  line.say(hello);
  await line.heard((reply) => 'window' in reply);
  const frame = (seq: number) => ({
    channel: 'c',
    seq,
    t0: seq,
    dt: 0.1,
    values: Array.from({ length: 10 }, (_, i) => 10 * seq + i),
  });
  for (let seq = 0; seq < 40; seq++) line.say(frame(seq));
  await line.heard((reply) => 'ack' in reply && reply.ack >= 10);
  relay.cut();
  for (let seq = 40; seq < 60; seq++) line.say(frame(seq));
  const acknowledged = Math.max(...line.replies.map((reply) => ('ack' in reply ? reply.ack : -1)));

  const again = await connect(server.port);
  again.say(hello);
  const answer = (await again.heard((reply) => 'resume' in reply)) as { resume: number };
  expect(answer.resume).toBeGreaterThan(acknowledged);
  await again.heard((reply) => 'window' in reply);
  for (let seq = answer.resume; seq < 80; seq++) again.say(frame(seq));
  await again.heard((reply) => 'ack' in reply && reply.ack === 79);
  if (WHOLE) {
    // the dead connection itself is noticed by its unanswered pings
    again.close();
    await until(async () => !(await api<ChannelState[]>(server.port, '/api/channels')).json[0]!.connected);
  }
  await server.close();
  const cost = await found(folder, 'c', 800);
  report({ tried: 'a cable pulled', acknowledged: 80, ...cost });
  expect(cost).toEqual({ lost: 0, twice: 0 });
});

it('a storm of producers that come and vanish at once loses and doubles nothing', async () => {
  const folder = temporaryFolder();
  const server = await serve(folder);
  const random = chance(5);
  const producers = WHOLE ? 200 : 40;
  const rounds = WHOLE ? 12 : 5;
  const frames = 30;
  let connections = 0;
  const value = (seq: number, i: number) => seq * 4 + i;
  /** connects again and again, breaks off at a random moment, and is content when all its frames are acknowledged */
  const storm = async (channel: string) => {
    let settled = -1;
    for (let round = 0; settled < frames - 1; round++) {
      const socket = await open(server.port, '/ingest', INGEST_PROTOCOL);
      connections++;
      const vanishes = round < rounds ? random() * 60 : Number.POSITIVE_INFINITY;
      const gone = once(socket, 'close');
      if (Number.isFinite(vanishes)) setTimeout(() => socket.terminate(), vanishes);
      socket.on('message', (data) => {
        const reply = JSON.parse(String(data)) as IngestReply;
        if ('resume' in reply) {
          expect(reply.resume).toBeGreaterThan(settled);
          for (let seq = reply.resume; seq < frames; seq++)
            socket.send(
              JSON.stringify({
                channel,
                seq,
                t0: seq,
                dt: 0.1,
                values: [0, 1, 2, 3].map((i) => value(seq, i)),
              }),
            );
          if (reply.resume === frames) settled = frames - 1;
        }
        if ('ack' in reply) settled = Math.max(settled, reply.ack);
        if (settled === frames - 1) socket.close();
      });
      socket.send(JSON.stringify({ hello: 1, run: channel, channels: [{ channel }] }));
      await gone;
    }
  };
  const names = Array.from({ length: producers }, (_, i) => `storm ${i}`);
  await Promise.all(names.map(storm));
  expect((await api(server.port, '/health')).status).toBe(200);
  await server.close();
  let [lost, twice] = [0, 0];
  for (const name of names) {
    const cost = await found(folder, name, 4 * frames);
    lost += cost.lost;
    twice += cost.twice;
  }
  report({ tried: `a storm of ${connections} connections`, acknowledged: producers * frames, lost, twice });
  expect([lost, twice]).toEqual([0, 0]);
}, 300_000);
