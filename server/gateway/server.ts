import { createServer, type IncomingMessage, type Server } from 'node:http';
import type { AddressInfo } from 'node:net';
import type { Duplex } from 'node:stream';
import { type WebSocket, WebSocketServer } from 'ws';
import { FEED_PROTOCOL } from '../../shared-types/feed.ts';
import { INGEST_PROTOCOL } from '../../shared-types/ingest.ts';
import type { Model } from '../../shared-types/model.ts';
import { Settings } from '../../shared-types/settings.ts';
import type { Store } from '../store/store.ts';
import type { Moment } from './channels.ts';
import { createFeedSession, type FeedFacts } from './feed.ts';
import { createHttpApp, whyNotAllowed } from './http.ts';
import { createHub, type Hub } from './hub.ts';
import { createPlays, type Player } from './plays.ts';
import { createRehearsals } from './rehearsals.ts';
import type { Surroundings } from './runningWatch.ts';

export interface ServerOptions {
  /** 0: any free port */
  port: number;
  listen: string;
  store: Store;
  settings?: Settings;
  demo: boolean;
  /** name and version, for the page */
  program: string;
  createWatch: Surroundings['createWatch'];
  readModel(json: string): Model;
  /** told in sentences what a person should know */
  warn(text: string): void;
  /** the built program that plays recordings, and the data folder it reads them from; left out: nothing is played */
  player?: Player;
  clock?: () => Moment;
}

export interface RunningServer {
  port: number;
  hub: Hub;
  /** stops taking, commits, acknowledges, saves snapshots, says goodbye with 1001 and closes the store */
  close(): Promise<void>;
}

/** Larger messages end the connection with 1009; frames are refused in words long before. */
const LARGEST_MESSAGE_BYTES = 64 * 1024 * 1024;
const LARGEST_REQUEST_BYTES = 64 * 1024;
/** A producer that reads none of its replies is hung up on; it may come again and hears where it stands. */
const UNREAD_REPLIES_BYTES = 1_000_000;
const GOING_AWAY = 1001;
const GOODBYE_MILLISECONDS = 1000;
/** a connection that answers no ping for this long is dead */
const PING_MILLISECONDS = 10_000;

/** The server's clocks: Unix seconds that advance with the monotonic clock, so that ages and spans never step. */
export function systemClock(): () => Moment {
  const offset = Date.now() / 1000 - performance.now() / 1000;
  return () => {
    const monotonic = performance.now() / 1000;
    return { server: offset + monotonic, monotonic };
  };
}

function serveProducers(hub: Hub, sockets: WebSocketServer): void {
  sockets.on('connection', (socket: WebSocket) => {
    const session = hub.producer(
      (reply) => {
        if (socket.readyState !== socket.OPEN) return;
        socket.send(JSON.stringify(reply));
        if (socket.bufferedAmount > UNREAD_REPLIES_BYTES) socket.terminate();
      },
      (code, reason) => socket.close(code, reason),
    );
    socket.on('message', (data: Buffer, binary) =>
      session.message(binary ? data : data.toString('utf8'), hub.now().server),
    );
    socket.on('error', () => {});
    socket.on('close', () => session.end());
  });
}

function servePages(hub: Hub, sockets: WebSocketServer, facts: FeedFacts): void {
  sockets.on('connection', (socket: WebSocket) => {
    const session = createFeedSession(
      hub,
      {
        send(message, written) {
          if (socket.readyState === socket.OPEN)
            socket.send(message, { binary: true }, (error) => {
              if (!error) written?.();
            });
        },
        waiting: () => socket.bufferedAmount,
        close: (code, reason) => socket.close(code, reason),
      },
      facts,
    );
    socket.on('message', (data: Buffer) => session.request(data.toString('utf8')));
    socket.on('error', () => {});
    socket.on('close', () => session.end());
  });
}

function socketServer(protocol: string, maxPayload: number): WebSocketServer {
  return new WebSocketServer({
    noServer: true,
    maxPayload,
    perMessageDeflate: false,
    // A five-minute producer need not know the protocol's name.
    handleProtocols: (offered) => (offered.has(protocol) ? protocol : false),
  });
}

function refuseUpgrade(socket: Duplex, status: string, detail: string): void {
  const body = JSON.stringify({ type: 'about:blank', title: status, detail });
  socket.end(
    `HTTP/1.1 ${status}\r\nContent-Type: application/problem+json\r\nContent-Length: ${Buffer.byteLength(body)}\r\n` +
      `Connection: close\r\n\r\n${body}`,
  );
}

function route(http: Server, paths: Record<string, WebSocketServer>): void {
  http.on('upgrade', (request: IncomingMessage, socket: Duplex, head: Buffer) => {
    socket.on('error', () => socket.destroy());
    const reason = whyNotAllowed(request.headers);
    if (reason !== null) return refuseUpgrade(socket, '403 Forbidden', reason);
    const path = (request.url ?? '').split('?')[0]!;
    const sockets = paths[path];
    if (!sockets)
      return refuseUpgrade(socket, '404 Not Found', 'producers connect to /ingest, pages to /feed');
    sockets.handleUpgrade(request, socket, head, (opened) => sockets.emit('connection', opened, request));
  });
}

/** Ends connections whose other side has vanished without a word. */
function watchLiveness(all: WebSocketServer[]): NodeJS.Timeout {
  const unanswered = new WeakSet<WebSocket>();
  const timer = setInterval(() => {
    for (const sockets of all)
      for (const socket of sockets.clients) {
        if (unanswered.has(socket)) {
          socket.terminate();
          continue;
        }
        unanswered.add(socket);
        socket.once('pong', () => unanswered.delete(socket));
        socket.ping();
      }
  }, PING_MILLISECONDS);
  timer.unref();
  return timer;
}

function goodbye(all: WebSocketServer[]): Promise<void> {
  const closed = all.flatMap((sockets) =>
    [...sockets.clients].map(
      (socket) =>
        new Promise<void>((resolve) => {
          socket.once('close', () => resolve());
          socket.close(GOING_AWAY, 'the server is stopping');
          setTimeout(() => socket.terminate(), GOODBYE_MILLISECONDS).unref();
        }),
    ),
  );
  return Promise.all(closed).then(() => {});
}

function listening(http: Server, port: number, host: string): Promise<number> {
  return new Promise((resolve, reject) => {
    http.once('error', reject);
    http.listen(port, host, () => resolve((http.address() as AddressInfo).port));
  });
}

const ingestAddress = (listen: string, port: number): string =>
  `ws://${listen === '::1' ? '[::1]' : listen}:${port}/ingest`;

/**
 * Starts the server: HTTP and the two WebSockets on one port, over a store that it closes in the end.
 *
 * @throws the system's error when the port cannot be had; the store is closed then
 */
export async function startServer(options: ServerOptions): Promise<RunningServer> {
  const { store, demo, program } = options;
  const now = options.clock ?? systemClock();
  const hub = await createHub({
    store,
    settings: options.settings ?? Settings.parse({}),
    now,
    createWatch: options.createWatch,
    readModel: options.readModel,
    warn: options.warn,
  });
  for (const notice of store.notices ?? []) {
    options.warn(notice);
    hub.journal.log({ kind: 'server', channel: null, watch: null, by: null, text: notice });
  }
  const rehearsals = await createRehearsals({
    store,
    journal: hub.journal,
    gap: hub.settings.recordingGap,
    program,
    serverTime: () => now().server,
    leftOutVersion: hub.leftOut.version,
    flushFrames: hub.recorder.flush,
    failed: options.warn,
  });
  const plays = createPlays({
    player: options.player ?? null,
    journal: hub.journal,
    channels: hub.channels,
    ingest: () => ingestAddress(options.listen, port),
  });
  const app = createHttpApp(hub, { rehearsals, plays });
  const http = createServer({ maxHeaderSize: 16 * 1024 }, app);
  const ingest = socketServer(INGEST_PROTOCOL, LARGEST_MESSAGE_BYTES);
  const feed = socketServer(FEED_PROTOCOL, LARGEST_REQUEST_BYTES);
  route(http, { '/ingest': ingest, '/feed': feed });
  let port = 0;
  try {
    port = await listening(http, options.port, options.listen);
  } catch (error) {
    await store.close();
    throw error;
  }
  serveProducers(hub, ingest);
  servePages(hub, feed, {
    program,
    startedAt: now().server,
    demo,
    ingestAddress: ingestAddress(options.listen, port),
  });
  const ticking = setInterval(hub.tick, 1000);
  const liveness = watchLiveness([ingest, feed]);
  hub.journal.log({ kind: 'server', channel: null, watch: null, by: null, text: `${program} started` });

  let closing: Promise<void> | null = null;
  const shutDown = async () => {
    clearInterval(ticking);
    clearInterval(liveness);
    http.close();
    await Promise.all([plays.close(), rehearsals.close()]);
    for (const socket of ingest.clients) socket.pause();
    hub.journal.log({ kind: 'server', channel: null, watch: null, by: null, text: `${program} stopped` });
    await hub.close();
    for (const socket of ingest.clients) socket.resume();
    await goodbye([ingest, feed]);
    http.closeAllConnections();
    await store.close();
  };
  return { port, hub, close: () => (closing ??= shutDown()) };
}
