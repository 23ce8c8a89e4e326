import { type IncomingMessage, STATUS_CODES } from 'node:http';
import type { Duplex } from 'node:stream';
import { type WebSocket, WebSocketServer } from 'ws';
import type { Access, Identity } from '../access/access.ts';
import type { HostCheck } from '../access/hostCheck.ts';
import type { Log } from '../logLines.ts';
import { problemJson } from './httpAnswers.ts';

/** One WebSocket address. */
export interface Door {
  sockets: WebSocketServer;
  /** who may come in, and what is said to others */
  lets(identity: Identity): boolean;
  others: string;
  /** connections at once */
  most: number;
}

/** Why a connection is not upgraded. */
interface Refusal {
  status: number;
  code: string;
  detail: string;
  headers?: Record<string, string>;
}

const RETRY_SECONDS = '5';
/** RFC 6455 is version 13 of the protocol. */
const VERSION = '13';

/** The rest of a refused upgrade: a plain answer with an RFC 9457 problem, and the end of the connection. */
export function refuse(socket: Duplex, { status, code, detail, headers = {} }: Refusal): void {
  const title = STATUS_CODES[status] ?? 'Refused';
  const body = problemJson(status, detail, code);
  const lines = Object.entries({
    'Content-Type': 'application/problem+json',
    'Content-Length': String(Buffer.byteLength(body)),
    'Cache-Control': 'no-store',
    Connection: 'close',
    ...headers,
  });
  socket.end(`HTTP/1.1 ${status} ${title}\r\n${lines.map(([k, v]) => `${k}: ${v}\r\n`).join('')}\r\n${body}`);
}

/** The server of one subprotocol; larger messages end the connection with 1009. */
export function socketServer(protocol: string, maxPayload: number): WebSocketServer {
  const sockets = new WebSocketServer({
    noServer: true,
    maxPayload,
    perMessageDeflate: false,
    // A five-minute producer need not know the protocol's name.
    handleProtocols: (offered) => (offered.has(protocol) ? protocol : false),
  });
  sockets.on('wsClientError', (error, socket) =>
    refuse(socket, {
      status: 400,
      code: 'BAD_HANDSHAKE',
      detail: `the WebSocket handshake cannot be used: ${error.message}; send it as RFC 6455 says`,
    }),
  );
  return sockets;
}

const BEARER = { 'WWW-Authenticate': 'Bearer realm="foreshift"' };

/** Why somebody is not let in without a token, with a wrong one, or after too many. */
export function whyUnknown(why: 'nobody' | 'wrong' | 'too many'): Refusal {
  if (why === 'too many')
    return {
      status: 429,
      code: 'TOO_MANY_ATTEMPTS',
      detail: 'too many wrong tokens came from this address; wait a minute',
      headers: { 'Retry-After': '60' },
    };
  if (why === 'wrong')
    return {
      status: 401,
      code: 'WRONG_TOKEN',
      detail: 'there is no such token here, or it was withdrawn; ask who runs this server for one',
      headers: { 'WWW-Authenticate': 'Bearer realm="foreshift", error="invalid_token"' },
    };
  return {
    status: 401,
    code: 'NOT_SIGNED_IN',
    detail: 'this server asks for a token; sign in on its page, or send Authorization: Bearer TOKEN',
    headers: BEARER,
  };
}

export interface UpgradeNeeds {
  check: HostCheck;
  access: Access;
  doors: Readonly<Record<string, Door>>;
  log: Log;
}

/** Whom an upgrade would let in where, or why not. */
function judge(
  request: IncomingMessage,
  { check, access, doors }: UpgradeNeeds,
): Refusal | { door: Door; identity: Identity } {
  const reason = check(request.headers);
  if (reason !== null) return { status: 403, code: 'OTHER_ORIGIN', detail: reason };
  const path = (request.url ?? '').split('?')[0]!;
  const door = Object.hasOwn(doors, path) ? doors[path] : undefined;
  if (door === undefined)
    return { status: 404, code: 'NOT_FOUND', detail: 'producers connect to /ingest, pages to /feed' };
  if (request.headers['sec-websocket-version'] !== VERSION)
    return {
      status: 426,
      code: 'OTHER_VERSION',
      detail: 'this server speaks version 13 of WebSocket (RFC 6455)',
      headers: { 'Sec-WebSocket-Version': VERSION, Upgrade: 'websocket' },
    };
  const known = access.identify(request);
  if (!known.ok) return whyUnknown(known.why);
  if (!door.lets(known.identity))
    return { status: 403, code: 'NOT_ALLOWED', detail: `the token "${known.identity.name}" ${door.others}` };
  if (door.sockets.clients.size >= door.most)
    return {
      status: 503,
      code: 'TOO_MANY_CONNECTIONS',
      detail: `${door.most} connections to ${path} are open already; close one, or raise the limit in settings.json`,
      headers: { 'Retry-After': RETRY_SECONDS },
    };
  return { door, identity: known.identity };
}

/** The connections that HTTP asks to upgrade: refused in words, or handed to their door as `connection` with who it is. */
export function takeUpgrade(
  request: IncomingMessage,
  socket: Duplex,
  head: Buffer,
  needs: UpgradeNeeds,
): void {
  socket.on('error', () => socket.destroy());
  const judged = judge(request, needs);
  if ('status' in judged) {
    const remote = request.socket.remoteAddress ?? '';
    const path = (request.url ?? '').split('?')[0]!.slice(0, 100);
    const { status, code, detail } = judged;
    needs.log({ level: 'notice', event: 'connection refused', text: detail, remote, path, status, code });
    refuse(socket, judged);
    return;
  }
  const { sockets } = judged.door;
  sockets.handleUpgrade(request, socket, head, (opened: WebSocket) =>
    sockets.emit('connection', opened, request, judged.identity),
  );
}
