import { connect as connectTcp } from 'node:net';
import { describe, expect, it } from 'vitest';
import { WebSocket } from 'ws';
import { FEED_PROTOCOL } from '../../../shared-types/feed.ts';
import { temporaryFolder } from '../store/temporaryFolder.ts';
import { connect, serve, until } from './harness.ts';

/** The status of an upgrade. */
const upgrade = (port: number, path: string) =>
  new Promise<{ status: number; retryAfter: string | undefined; code: string | null; socket: WebSocket }>(
    (resolve) => {
      const socket = new WebSocket(
        `ws://127.0.0.1:${port}${path}`,
        path === '/feed' ? FEED_PROTOCOL : undefined,
      );
      socket.on('error', () => {});
      socket.on('open', () => resolve({ status: 101, retryAfter: undefined, code: null, socket }));
      socket.on('unexpected-response', async (_request, response) => {
        let text = '';
        for await (const part of response) text += part;
        const { code } = JSON.parse(text);
        resolve({ status: response.statusCode!, retryAfter: response.headers['retry-after'], code, socket });
      });
    },
  );

describe('connections beyond the limit', () => {
  it.each(['/ingest', '/feed'])('of %s are refused with 503 until one is closed', async (path) => {
    const { port } = await serve(temporaryFolder(), { mostProducers: 2, mostPages: 2 });
    const open = [await upgrade(port, path), await upgrade(port, path)];
    expect(open.map(({ status }) => status)).toEqual([101, 101]);
    expect(await upgrade(port, path)).toMatchObject({
      status: 503,
      retryAfter: '5',
      code: 'TOO_MANY_CONNECTIONS',
    });
    const other = path === '/feed' ? '/ingest' : '/feed';
    const beside = await upgrade(port, other);
    expect(beside.status).toBe(101);
    open[0]!.socket.close();
    let again = await upgrade(port, path);
    await until(async () => {
      if (again.status !== 101) again = await upgrade(port, path);
      return again.status === 101;
    });
    for (const { socket } of [...open, again, beside]) socket.terminate();
  });

  it('of any kind are hung up on, and the server goes on', async () => {
    const { port } = await serve(temporaryFolder(), { mostProducers: 1, mostPages: 1 });
    const idle = Array.from({ length: 300 }, () => {
      const socket = connectTcp(port, '127.0.0.1');
      socket.on('error', () => {});
      return socket.resume();
    });
    const left = () => idle.filter(({ destroyed }) => !destroyed).length;
    await until(() => left() <= 258);
    expect(left()).toBe(258);
    for (const socket of idle) socket.destroy();
    const health = () => fetch(`http://127.0.0.1:${port}/health`, { signal: AbortSignal.timeout(500) });
    await until(async () => (await health().catch(() => null))?.status === 200);
  });
});

describe('a producer that sends too fast', () => {
  it('is read more slowly, loses nothing, and leaves the others their pace', async () => {
    const lines: string[] = [];
    const { port, hub } = await serve(
      temporaryFolder(),
      { fastestFrames: 40 },
      { log: ({ event }) => lines.push(event) },
    );
    const fast = await connect(port);
    const started = performance.now();
    fast.say({ hello: 1, run: 'r', channels: [{ channel: 'fast' }] });
    await fast.heard((reply) => 'window' in reply);
    // large enough for a read of the socket to bring a few at a time
    const values = Array.from({ length: 400 }, (_, i) => Math.sin(i));
    for (let seq = 0; seq < 120; seq++) fast.say({ channel: 'fast', seq, t0: 400 * seq, dt: 1, values });
    const slow = await connect(port);
    slow.say({ hello: 1, run: 'r', channels: [{ channel: 'slow' }] });
    await slow.heard((reply) => 'window' in reply);
    slow.say({ channel: 'slow', seq: 0, t0: 0, dt: 1, values: [1] });
    await slow.heard((reply) => 'ack' in reply);
    expect(hub.channels.samples('fast')).toBeLessThan(120 * 400);
    await fast.heard((reply) => 'ack' in reply && reply.ack === 119);
    // a second's worth at once, 40 a second of the rest
    expect((performance.now() - started) / 1000).toBeGreaterThan(1.5);
    expect(hub.channels.samples('fast')).toBe(120 * 400);
    expect(lines.filter((event) => event === 'producer slowed')).toHaveLength(1);
  });
});

describe('a page that does not read', () => {
  it('holds back neither the producers nor the other pages, and little is kept for it', async () => {
    const { port, hub } = await serve(temporaryFolder());
    const look = JSON.stringify({ look: { seconds: 3600, columns: 20_000 } });
    const stuck = await upgrade(port, '/feed');
    const reading = await upgrade(port, '/feed');
    let heard = 0;
    reading.socket.on('message', (data: Buffer) => (heard += data.length));
    for (const { socket } of [stuck, reading]) socket.send(look);
    (stuck.socket as unknown as { _socket: { pause(): void } })._socket.pause();
    const line = await connect(port);
    const channels = Array.from({ length: 8 }, (_, n) => `channel ${n}`);
    line.say({ hello: 1, run: 'r', channels: channels.map((channel) => ({ channel, interval: 0.1 })) });
    await line.heard((reply) => 'window' in reply);
    const values = Array.from({ length: 2000 }, (_, i) => Math.sin(i));
    const before = process.memoryUsage().arrayBuffers;
    for (let seq = 0; seq < 30; seq++) {
      for (const channel of channels) line.say({ channel, seq, t0: 200 * seq, dt: 0.1, values });
      await line.heard((reply) => 'ack' in reply && reply.channel === 'channel 7' && reply.ack >= seq);
    }
    expect(hub.channels.samples('channel 7')).toBe(60_000);
    await until(() => heard > 3_000_000);
    // beyond 1 MB waiting no drawing data are added: see feed.ts
    expect(process.memoryUsage().arrayBuffers - before).toBeLessThan(60_000_000);
    for (const { socket } of [stuck, reading]) socket.terminate();
  });
});
