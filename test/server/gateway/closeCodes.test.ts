import { connect as connectTcp } from 'node:net';
import { afterEach, describe, expect, it } from 'vitest';
import { WebSocket } from 'ws';
import { fittingReason } from '../../../server/gateway/sockets.ts';
import { FEED_PROTOCOL } from '../../../shared-types/feed.ts';
import { temporaryFolder } from '../store/temporaryFolder.ts';
import { connect, type Line, serve, until } from './harness.ts';

const pages: WebSocket[] = [];
afterEach(() => {
  for (const page of pages.splice(0)) page.terminate();
});

async function openPage(port: number) {
  const socket = new WebSocket(`ws://127.0.0.1:${port}/feed`, FEED_PROTOCOL);
  pages.push(socket);
  const closed = new Promise<{ code: number; reason: string }>((resolve) =>
    socket.once('close', (code, reason) => resolve({ code, reason: String(reason) })),
  );
  socket.on('error', () => {});
  await new Promise((resolve) => socket.once('open', resolve));
  return { socket, closed };
}

/** A frame as it goes over the wire (RFC 6455, 5.2), masked with zeros. */
const wire = (first: number, payload: Buffer) => {
  expect(payload.length).toBeLessThan(126);
  return Buffer.concat([Buffer.of(first, 0x80 | payload.length, 0, 0, 0, 0), payload]);
};

/** The code of the close frame that raw bytes are answered with. */
const rawClose = (port: number, bytes: Buffer) =>
  new Promise<number>((resolve, reject) => {
    const socket = connectTcp(port, '127.0.0.1', () =>
      socket.write(
        `GET /ingest HTTP/1.1\r\nHost: 127.0.0.1:${port}\r\nConnection: Upgrade\r\nUpgrade: websocket\r\n` +
          'Sec-WebSocket-Version: 13\r\nSec-WebSocket-Key: dGhlIHNhbXBsZSBub25jZQ==\r\n\r\n',
      ),
    );
    let said = Buffer.alloc(0);
    let sent = false;
    socket.on('error', reject);
    socket.on('data', (data) => {
      said = Buffer.concat([said, data]);
      const end = said.indexOf('\r\n\r\n');
      if (end === -1) return;
      if (!sent) socket.write(bytes);
      sent = true;
      const frame = said.subarray(end + 4);
      if (frame.length < 4) return;
      expect(frame[0]).toBe(0x88);
      resolve(frame.readUInt16BE(2));
      socket.destroy();
    });
  });

const hello = (line: Line, channel: string, run = 'r') =>
  line.say({ hello: 1, run, channels: [{ channel }] });

/** The codes: RFC 6455, 7.4.1; 1013 of the IANA registry it founds; 4000–4999 are for private use. */
describe('a connection that the server ends', () => {
  it('is told 1001 when the server stops, producers and pages alike', async () => {
    const server = await serve(temporaryFolder());
    const line = await connect(server.port);
    const page = await openPage(server.port);
    await server.close();
    expect(await line.closed).toEqual({ code: 1001, reason: 'the server is stopping' });
    expect(await page.closed).toEqual({ code: 1001, reason: 'the server is stopping' });
  });

  it.each([
    ['1002 for a frame with reserved bits', 1002, wire(0xf1, Buffer.from('{}'))],
    ['1002 for an opcode that is none', 1002, wire(0x83, Buffer.from('{}'))],
    ['1007 for text that is not UTF-8', 1007, wire(0x81, Buffer.of(0xff, 0xfe, 0xfd))],
    [
      '1009 for a message beyond the limit',
      1009,
      Buffer.from([0x82, 0xff, 0, 0, 0, 0, 0x7f, 0xff, 0xff, 0xff, 0, 0, 0, 0]),
    ],
  ])('is told %s', async (_what, code, bytes) => {
    const { port } = await serve(temporaryFolder());
    expect(await rawClose(port, bytes)).toBe(code);
  });

  it('is told 1003 when a page sends binary, 1008 when it sends what it may not', async () => {
    const { port } = await serve(temporaryFolder());
    const binary = await openPage(port);
    binary.socket.send(Buffer.of(1, 2, 3));
    expect(await binary.closed).toMatchObject({ code: 1003, reason: expect.stringContaining('text') });
    const nosy = await openPage(port);
    nosy.socket.send('{"tell":"everything"}');
    expect(await nosy.closed).toMatchObject({ code: 1008, reason: expect.stringContaining('look') });
    const large = await openPage(port);
    large.socket.send(`{"look":"${'x'.repeat(100_000)}"}`);
    expect((await large.closed).code).toBe(1009);
  });

  it('is told 1008 for a hello that cannot be used', async () => {
    const { port } = await serve(temporaryFolder());
    const line = await connect(port);
    line.say({ hello: 2 });
    expect(await line.closed).toMatchObject({ code: 1008, reason: expect.stringMatching(/^bad hello: /) });
  });

  it('is told 1013 while another producer sends, 4001 when it was taken over, in as many bytes as fit', async () => {
    const { port } = await serve(temporaryFolder());
    // 80 letters of three bytes each: the sentence with them is longer than a close frame
    const channel = '漢'.repeat(80);
    const first = await connect(port);
    hello(first, channel);
    await first.heard((reply) => 'window' in reply);
    first.say({ channel, seq: 0, t0: 0, dt: 1, values: [1] });
    await first.heard((reply) => 'ack' in reply);
    const second = await connect(port);
    hello(second, channel, 'another');
    const { code, reason } = await second.closed;
    expect([code, reason.startsWith('another producer is sending to')]).toEqual([1013, true]);
    const again = await connect(port);
    hello(again, channel);
    expect(await first.closed).toEqual({ code: 4001, reason: 'another connection took over' });
    await again.heard((reply) => 'window' in reply);
  });

  it('is told 1008 beyond the channels there may be, and the server goes on', async () => {
    const server = await serve(temporaryFolder(), { mostChannels: 2 });
    const line = await connect(server.port);
    line.say({ hello: 1, run: 'r', channels: [{ channel: 'a' }, { channel: 'b' }, { channel: 'c' }] });
    expect(await line.closed).toMatchObject({
      code: 1008,
      reason: expect.stringContaining('"c" would be beyond the 2'),
    });
    const plain = await connect(server.port);
    for (const channel of ['a', 'b', 'c', 'd']) plain.say({ channel, dt: 1, values: [1] });
    await until(() => plain.replies.length === 2);
    expect(plain.replies.map((reply) => 'code' in reply && reply.code)).toEqual([
      'TOO_MANY_CHANNELS',
      'TOO_MANY_CHANNELS',
    ]);
    expect(server.hub.channels.names()).toEqual(['a', 'b']);
  });
});

describe('the reason of a close', () => {
  it('is cut to what a close frame takes, between letters', () => {
    expect(fittingReason('short')).toBe('short');
    for (const text of ['x'.repeat(500), '漢'.repeat(100), '🙂'.repeat(60)])
      expect(Buffer.byteLength(fittingReason(text))).toBeLessThanOrEqual(123);
  });
});
