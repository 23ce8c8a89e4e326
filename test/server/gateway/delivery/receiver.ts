import { createServer, type IncomingHttpHeaders, type ServerResponse } from 'node:http';
import type { AddressInfo } from 'node:net';
import { afterEach } from 'vitest';

export interface Came {
  path: string;
  headers: IncomingHttpHeaders;
  body: string;
  /** milliseconds since the process began */
  at: number;
}

type Answer = (response: ServerResponse, came: Came, count: number) => void;

const closing: (() => Promise<void>)[] = [];
afterEach(async () => {
  for (const close of closing.splice(0)) await close();
});

/** A real receiver on a port of its own; closed after the test. */
export async function receiver(
  answer: Answer = (response) => response.writeHead(204).end(),
  port = 0,
): Promise<{ port: number; url: string; came: Came[]; close(): Promise<void> }> {
  const came: Came[] = [];
  const server = createServer((request, response) => {
    let body = '';
    request.setEncoding('utf8').on('data', (part: string) => {
      body += part;
    });
    request.on('end', () => {
      const one = { path: request.url ?? '', headers: request.headers, body, at: performance.now() };
      came.push(one);
      answer(response, one, came.length);
    });
  });
  await new Promise<void>((resolve) => server.listen(port, '127.0.0.1', resolve));
  const close = () =>
    new Promise<void>((resolve) => {
      server.close(() => resolve());
      server.closeAllConnections();
    });
  closing.push(close);
  const { port: taken } = server.address() as AddressInfo;
  return { port: taken, url: `http://127.0.0.1:${taken}/warnings`, came, close };
}
