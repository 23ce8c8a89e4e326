import type { IncomingMessage } from 'node:http';
import type { WebSocket, WebSocketServer } from 'ws';
import type { Identity } from './access/access.ts';
import { mayFeed } from './access/accessRules.ts';
import { createFeedSession, type FeedFacts } from './feed/feed.ts';
import type { Hub } from './hub.ts';
import { createAllowance } from './ingest/allowance.ts';
import type { Log } from './logLines.ts';

const GOING_AWAY = 1001;
const UNSUPPORTED_DATA = 1003;
const POLICY_VIOLATION = 1008;
const GOODBYE_MILLISECONDS = 1000;
/** a connection that answers no ping for this long is dead */
const PING_MILLISECONDS = 10_000;
/** A producer that leaves this much unread reads nothing: it is hung up on, and a true one connects anew. */
const UNREAD_REPLIES_BYTES = 8 * 1024 * 1024;
/** Of a close frame, the reason has so many bytes (RFC 6455, 5.5). */
const REASON_BYTES = 123;

/** Who is at the other end of each open connection. */
const identities = new WeakMap<WebSocket, Identity>();

/** As much of a reason as a close frame takes. */
export function fittingReason(reason: string): string {
  let fitting = reason.slice(0, REASON_BYTES);
  while (Buffer.byteLength(fitting) > REASON_BYTES) fitting = fitting.slice(0, -1);
  return fitting;
}

interface Told {
  log: Log;
  /** seconds that never step */
  monotonic(): number;
}

/** Logs the beginning and the end of a connection. */
function tellOf(
  kind: 'producer' | 'page',
  socket: WebSocket,
  request: IncomingMessage,
  identity: Identity,
  log: Log,
) {
  const known = {
    remote: request.socket.remoteAddress ?? '',
    ...(identity.name ? { who: identity.name } : {}),
  };
  identities.set(socket, identity);
  log({ level: 'notice', event: `${kind} connected`, text: `a ${kind} connected`, ...known });
  socket.on('close', (code, reason) => {
    const why = reason.length > 0 ? `: ${reason.toString()}` : '';
    log({
      level: 'notice',
      event: `${kind} gone`,
      text: `a ${kind} hung up or was hung up on${why}`,
      code,
      ...known,
    });
  });
}

/**
 * Reads a producer no faster than the settings say: nothing is lost, its own window and the network hold it back.
 *
 * @returns told of each message
 */
function reading(
  socket: WebSocket,
  hub: Hub,
  remote: string,
  { log, monotonic }: Told,
): (bytes: number) => void {
  const frames = createAllowance(hub.settings.fastestFrames);
  const bytes = createAllowance(hub.settings.fastestBytes);
  return (size) => {
    const wait = Math.max(frames.use(1, monotonic()), bytes.use(size, monotonic()));
    if (wait === 0 || socket.isPaused) return;
    socket.pause();
    setTimeout(() => socket.resume(), 1000 * wait).unref();
    log({
      level: 'warning',
      event: 'producer slowed',
      text: `a producer at ${remote} sends faster than settings.json allows and is read more slowly`,
      remote,
    });
  };
}

/** How long a ping is waited for, milliseconds. */
const ROUND_TRIP_MILLISECONDS = 2000;
let pings = 0;

/** Seconds until the other side has answered a ping (RFC 6455, 5.5.2), which every WebSocket does; null: it did not. */
function roundTrip(socket: WebSocket): Promise<number | null> {
  const payload = `trial ${++pings}`;
  const began = performance.now();
  return new Promise((resolve) => {
    const settle = (seconds: number | null) => {
      clearTimeout(limit);
      socket.off('pong', hear);
      resolve(seconds);
    };
    const hear = (data: Buffer) => {
      if (data.toString() === payload) settle((performance.now() - began) / 1000);
    };
    const limit = setTimeout(settle, ROUND_TRIP_MILLISECONDS, null);
    socket.on('pong', hear);
    socket.ping(payload, undefined, (error) => error && settle(null));
  });
}

/**
 * Producers.
 *
 * @returns called when the server stops: from then on nothing is taken, so that all that was can be acknowledged
 */
export function serveProducers(hub: Hub, sockets: WebSocketServer, told: Told): () => void {
  let taking = true;
  sockets.on('connection', (socket: WebSocket, request: IncomingMessage, identity: Identity) => {
    tellOf('producer', socket, request, identity, told.log);
    const noteRead = reading(socket, hub, request.socket.remoteAddress ?? '', told);
    const session = hub.producer(
      (reply) => {
        if (socket.readyState !== socket.OPEN) return;
        socket.send(JSON.stringify(reply));
        if (socket.bufferedAmount > UNREAD_REPLIES_BYTES) socket.terminate();
      },
      (code, reason) => socket.close(code, fittingReason(reason)),
      (channel) => mayFeed(identity, channel),
      () => roundTrip(socket),
    );
    socket.on('message', (data: Buffer, binary) => {
      if (!taking) return;
      noteRead(data.length);
      session.message(binary ? data : data.toString('utf8'), hub.now().server);
    });
    socket.on('error', () => {});
    socket.on('close', () => session.end());
  });
  return () => {
    taking = false;
  };
}

/** Pages. */
export function servePages(hub: Hub, sockets: WebSocketServer, facts: FeedFacts, { log }: Told): void {
  sockets.on('connection', (socket: WebSocket, request: IncomingMessage, identity: Identity) => {
    tellOf('page', socket, request, identity, log);
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
        close: (code, reason) => socket.close(code, fittingReason(reason)),
      },
      facts,
    );
    socket.on('message', (data: Buffer, binary) => {
      if (binary) socket.close(UNSUPPORTED_DATA, 'a page sends text: {"look": {"seconds", "columns"}}');
      else session.request(data.toString('utf8'));
    });
    socket.on('error', () => {});
    socket.on('close', () => session.end());
  });
}

/** Ends the connections whose token was withdrawn or whose session is over. */
export function putOut(all: WebSocketServer[]): void {
  for (const sockets of all)
    for (const socket of sockets.clients) {
      if (socket.readyState === socket.OPEN && identities.get(socket)?.holds() === false)
        socket.close(POLICY_VIOLATION, 'its token was withdrawn, or it signed out');
    }
}

/** Ends connections whose other side has vanished without a word. */
export function watchLiveness(all: WebSocketServer[]): NodeJS.Timeout {
  const unanswered = new WeakSet<WebSocket>();
  const timer = setInterval(() => {
    for (const sockets of all)
      for (const socket of sockets.clients) {
        // one that is being held back has its answer waiting unread
        if (socket.isPaused) continue;
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

/** Says goodbye to everybody; resolves once all are gone. */
export function goodbye(all: WebSocketServer[]): Promise<void> {
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
