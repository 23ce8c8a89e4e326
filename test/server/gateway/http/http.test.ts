import { connect as connectTcp } from 'node:net';
import { beforeEach, describe, expect, it } from 'vitest';
import { temporaryFolder } from '../../store/temporaryFolder.ts';
import { serve } from '../harness.ts';

let port: number;
beforeEach(async () => {
  port = (await serve(temporaryFolder())).port;
});

interface Answer {
  status: number;
  headers: Headers;
  body: string;
}

async function ask(
  method: string,
  path: string,
  body?: string,
  headers: Record<string, string> = {},
): Promise<Answer> {
  const response = await fetch(`http://127.0.0.1:${port}${path}`, {
    method,
    headers,
    ...(body === undefined ? {} : { body }),
  });
  return { status: response.status, headers: response.headers, body: await response.text() };
}

/** Sends bytes as they are. */
const raw = (text: string) =>
  new Promise<Answer>((resolve, reject) => {
    const socket = connectTcp(port, '127.0.0.1', () => socket.write(text));
    let said = '';
    socket.on('data', (data) => (said += data));
    socket.on('error', reject);
    socket.on('close', () => {
      const [head = '', body = ''] = said.split('\r\n\r\n');
      const [first = '', ...lines] = head.split('\r\n');
      const headers = new Headers(lines.map((line) => line.split(': ', 2) as [string, string]));
      resolve({ status: Number(first.split(' ')[1]), headers, body });
    });
  });

/** Members and media type of a problem: RFC 9457, 3.1 and 3; the title of "about:blank" is the status's (4.2.1). */
function expectProblem({ status, headers, body }: Answer, wanted: number, title: string): void {
  expect(status, body).toBe(wanted);
  expect(headers.get('content-type')).toMatch(/^application\/problem\+json/);
  const problem = JSON.parse(body);
  expect(problem).toMatchObject({ type: 'about:blank', title, status: wanted });
  expect(problem.code).toMatch(/^[A-Z_]+$/);
  expect(problem.detail.length).toBeGreaterThan(15);
}

const JSON_TYPE = { 'content-type': 'application/json' };
const host = () => `Host: 127.0.0.1:${port}\r\nConnection: close\r\n`;

/** Titles: RFC 9110, 15; 426 and 431 of RFC 9110 and RFC 6585. */
const WRONG: [string, number, string, () => Promise<Answer>][] = [
  ['a path that is not there', 404, 'Not Found', () => ask('GET', '/nothing/here')],
  ['a path of the API that is not there', 404, 'Not Found', () => ask('GET', '/api/nothing')],
  ['a name that is not there', 404, 'Not Found', () => ask('GET', '/api/channels/none/columns')],
  [
    'another method on a route',
    405,
    'Method Not Allowed',
    () => ask('PUT', '/api/channels', '{}', JSON_TYPE),
  ],
  ['another method on the page', 405, 'Method Not Allowed', () => ask('POST', '/', '{}', JSON_TYPE)],
  [
    'another method on an exact path beside one with a name',
    405,
    'Method Not Allowed',
    () => ask('DELETE', '/api/models/x'),
  ],
  ['a body that is no JSON', 400, 'Bad Request', () => ask('POST', '/api/watches', '{"model":', JSON_TYPE)],
  ['JSON that is no object', 400, 'Bad Request', () => ask('POST', '/api/watches', '3', JSON_TYPE)],
  [
    'a body of another type',
    415,
    'Unsupported Media Type',
    () => ask('POST', '/api/watches', '<a/>', { 'content-type': 'application/xml' }),
  ],
  [
    'a form',
    415,
    'Unsupported Media Type',
    () => ask('POST', '/api/models', 'a=1', { 'content-type': 'application/x-www-form-urlencoded' }),
  ],
  [
    'a body in a character set of its own',
    415,
    'Unsupported Media Type',
    () => ask('POST', '/api/watches', '{}', { 'content-type': 'application/json; charset=koi8-r' }),
  ],
  [
    'a body packed in a way of its own',
    415,
    'Unsupported Media Type',
    () => ask('POST', '/api/watches', '{}', { ...JSON_TYPE, 'content-encoding': 'zpaq' }),
  ],
  [
    'a body that is too large',
    413,
    'Content Too Large',
    () => ask('POST', '/api/watches', `"${'x'.repeat(2e6)}"`, JSON_TYPE),
  ],
  ['a query that cannot be', 400, 'Bad Request', () => ask('GET', '/api/warnings?after=soon')],
  ['a path that is not UTF-8', 400, 'Bad Request', () => ask('GET', '/api/models/%E0%A4%A')],
  ['a WebSocket address asked for as a page', 426, 'Upgrade Required', () => ask('GET', '/feed')],
  [
    'another host',
    403,
    'Forbidden',
    () => raw(`GET / HTTP/1.1\r\nHost: elsewhere.example\r\nConnection: close\r\n\r\n`),
  ],
  [
    'a page of another origin',
    403,
    'Forbidden',
    () => ask('POST', '/api/watches', '{}', { ...JSON_TYPE, origin: 'http://127.0.0.1:1' }),
  ],
  ['what is no HTTP', 400, 'Bad Request', () => raw('good morning\r\n\r\n')],
  [
    'headers without end',
    431,
    'Request Header Fields Too Large',
    () => raw(`GET / HTTP/1.1\r\n${host()}X: ${'x'.repeat(20_000)}\r\n\r\n`),
  ],
  [
    'an expectation',
    417,
    'Expectation Failed',
    () => raw(`GET / HTTP/1.1\r\n${host()}Expect: the-unexpected\r\n\r\n`),
  ],
  [
    'an upgrade of another path',
    404,
    'Not Found',
    () => raw(upgradeOf('/elsewhere', 'Sec-WebSocket-Version: 13')),
  ],
  [
    'an upgrade to an older WebSocket',
    426,
    'Upgrade Required',
    () => raw(upgradeOf('/feed', 'Sec-WebSocket-Version: 8')),
  ],
  [
    'an upgrade without a key',
    400,
    'Bad Request',
    () => raw(upgradeOf('/feed', 'Sec-WebSocket-Version: 13').replace(/Sec-WebSocket-Key.*\r\n/, '')),
  ],
];

const upgradeOf = (path: string, header: string) =>
  `GET ${path} HTTP/1.1\r\nHost: 127.0.0.1:${port}\r\nConnection: Upgrade\r\nUpgrade: websocket\r\n` +
  `Sec-WebSocket-Key: dGhlIHNhbXBsZSBub25jZQ==\r\n${header}\r\n\r\n`;

describe('what is wrong with a request', () => {
  it.each(WRONG)('is a problem by RFC 9457: %s', async (_what, status, title, asked) => {
    expectProblem(await asked(), status, title);
  });

  it('names the methods there are (RFC 9110, 15.5.6)', async () => {
    expect((await ask('PUT', '/api/watches', '{}', JSON_TYPE)).headers.get('allow')).toBe('GET, HEAD, POST');
    expect((await ask('GET', '/api/marks/3')).headers.get('allow')).toBe('DELETE');
  });

  it('names the version there is (RFC 6455, 4.4)', async () => {
    const { headers } = await raw(upgradeOf('/feed', 'Sec-WebSocket-Version: 8'));
    expect(headers.get('sec-websocket-version')).toBe('13');
  });
});

describe('every answer', () => {
  it('forbids pages everything but their own files, and is kept nowhere when it changes', async () => {
    for (const path of ['/', '/health', '/api/channels', '/nothing']) {
      const { headers } = await ask('GET', path);
      const policy = headers.get('content-security-policy')!;
      expect(policy).toContain("default-src 'none'");
      expect(policy).not.toMatch(/unsafe|data:|\*|https?:/);
      expect(headers.get('x-content-type-options')).toBe('nosniff');
      if (path !== '/') expect(headers.get('cache-control')).toBe('no-store');
    }
  });
});
