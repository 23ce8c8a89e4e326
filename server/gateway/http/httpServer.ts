import {
  createServer,
  type IncomingMessage,
  type RequestListener,
  type Server,
  type ServerResponse,
} from 'node:http';
import { createServer as createTlsServer } from 'node:https';
import type { AddressInfo } from 'node:net';
import type { Duplex } from 'node:stream';
import { problemJson } from './httpAnswers.ts';
import { refuse } from './upgrades.ts';

/** What is listened with over TLS, PEM. */
export interface Tls {
  certificate: Buffer;
  key: Buffer;
}

/** Limits of every HTTP connection: milliseconds, bytes. */
const LIMITS = {
  maxHeaderSize: 16 * 1024,
  headersTimeout: 15_000,
  requestTimeout: 120_000,
  keepAliveTimeout: 10_000,
  connectionsCheckingInterval: 5_000,
};
/** Who neither sends nor reads for so long is hung up on. */
const IDLE_MILLISECONDS = 120_000;

const BROKEN: Record<string, [number, string]> = {
  HPE_HEADER_OVERFLOW: [431, 'the headers are larger than 16 KiB; send fewer'],
  ERR_HTTP_REQUEST_TIMEOUT: [408, 'the request did not come to its end in time; send it faster'],
};

/** What could not even be read as a request is answered with a problem too. */
function answerBroken(error: NodeJS.ErrnoException, socket: Duplex): void {
  if (error.code === 'ECONNRESET' || !socket.writable) {
    socket.destroy();
    return;
  }
  const [status, detail] = BROKEN[error.code ?? ''] ?? [400, 'this is no HTTP request; send one by RFC 9112'];
  refuse(socket, { status, detail, code: 'BAD_REQUEST' });
}

/**
 * The HTTP server, over TLS if there is a certificate.
 *
 * @param most connections at once; further ones are hung up on
 */
export function createHttpServer(app: RequestListener, tls: Tls | null, most: number): Server {
  const server: Server =
    tls === null
      ? createServer(LIMITS, app)
      : (createTlsServer(
          { ...LIMITS, cert: tls.certificate, key: tls.key, minVersion: 'TLSv1.2', handshakeTimeout: 15_000 },
          app,
        ) as unknown as Server);
  server.maxConnections = most;
  server.setTimeout(IDLE_MILLISECONDS);
  server.on('clientError', answerBroken);
  server.on('checkExpectation', (_request: IncomingMessage, response: ServerResponse) => {
    const body = problemJson(417, 'only Expect: 100-continue is understood; leave it out', 'BAD_REQUEST');
    response.writeHead(417, { 'Content-Type': 'application/problem+json', 'Content-Length': body.length });
    response.end(body);
  });
  return server;
}

/** Listens; resolves with the port. */
export function listening(http: Server, port: number, host: string): Promise<number> {
  return new Promise((resolve, reject) => {
    http.once('error', reject);
    http.listen(port, host, () => resolve((http.address() as AddressInfo).port));
  });
}
