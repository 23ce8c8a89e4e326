import { connect as connectTcp } from 'node:net';
import { beforeEach, describe, expect, it } from 'vitest';
import { WebSocket } from 'ws';
import { createAccess } from '../../../../server/gateway/access/access.ts';
import { RULES, type Rule } from '../../../../server/gateway/access/accessRules.ts';
import { createToken, withdrawToken } from '../../../../server/gateway/access/accessTokens.ts';
import { MOST_FAILURES } from '../../../../server/gateway/access/failures.ts';
import type { LogLine } from '../../../../server/gateway/logLines.ts';
import type { RunningServer } from '../../../../server/gateway/server.ts';
import { FEED_PROTOCOL } from '../../../../shared-types/feed.ts';
import { INGEST_PROTOCOL } from '../../../../shared-types/ingest.ts';
import { temporaryFolder } from '../../store/temporaryFolder.ts';
import { serve, until } from '../harness.ts';

let folder: string;
let server: RunningServer;
let log: LogLine[];
let tokens: Record<'operator' | 'viewer' | 'producer' | 'bound', string>;

beforeEach(async () => {
  folder = temporaryFolder();
  log = [];
  const make = (name: string, role: 'operator' | 'viewer' | 'producer', channels: string[] | null = null) =>
    createToken(folder, { name, role, channels }, new Date());
  tokens = {
    operator: make('desk', 'operator'),
    viewer: make('hall', 'viewer'),
    producer: make('rig', 'producer'),
    bound: make('rig c', 'producer', ['c']),
  };
  const now = () => Date.now() / 1000;
  const access = createAccess({ folder, now, secure: false, warn: expect.unreachable });
  server = await serve(folder, {}, { access, log: (line) => log.push(line) });
});

const at = (path: string) => `http://127.0.0.1:${server.port}${path}`;
const bearer = (token: string) => ({ authorization: `Bearer ${token}` });

/** Asks with a method, headers and a body that no route can use, so that nothing but the gate decides between the answers. */
async function ask(route: string, headers: Record<string, string> = {}, body?: string) {
  const [method, pattern] = route.split(' ') as [string, string];
  const path = pattern.replaceAll(/:\w+/g, '99999');
  const given = body ?? (method === 'GET' ? undefined : '{"nothing":1}');
  const json = { 'content-type': 'application/json' };
  const response = await fetch(at(path), {
    method,
    headers: given === undefined ? headers : { ...json, ...headers },
    ...(given === undefined ? {} : { body: given }),
  });
  const text = await response.text();
  return { status: response.status, headers: response.headers, text };
}

async function signIn(token: string): Promise<string> {
  const { headers, status } = await ask('POST /access', {}, JSON.stringify({ token }));
  expect(status).toBe(200);
  return headers.get('set-cookie')!.split(';')[0]!;
}

/** What an upgrade was answered: 101, or the status of the refusal with its problem. */
function upgrade(path: string, headers: Record<string, string>, protocol: string) {
  return new Promise<{
    status: number;
    problem: { code?: string; detail?: string } | null;
    socket: WebSocket;
  }>((resolve) => {
    const socket = new WebSocket(`ws://127.0.0.1:${server.port}${path}`, protocol, { headers });
    socket.on('error', () => {});
    socket.on('open', () => resolve({ status: 101, problem: null, socket }));
    socket.on('unexpected-response', async (_request, response) => {
      let text = '';
      for await (const part of response) text += part;
      expect(response.headers['content-type']).toBe('application/problem+json');
      resolve({ status: response.statusCode!, problem: JSON.parse(text), socket });
    });
  });
}
const ingest = (headers: Record<string, string>) => upgrade('/ingest', headers, INGEST_PROTOCOL);
const feed = (headers: Record<string, string>) => upgrade('/feed', headers, FEED_PROTOCOL);
const closed = (socket: WebSocket) =>
  new Promise<{ code: number; reason: string }>((resolve) =>
    socket.once('close', (code, reason) => resolve({ code, reason: String(reason) })),
  );

describe('the rules', () => {
  it('name every route the router has, and no other', () => {
    expect(server.routes().sort()).toEqual(Object.keys(RULES).sort());
  });

  it('let a viewer change nothing', () => {
    const changes = Object.entries(RULES).filter(
      ([route, rule]) => !route.startsWith('GET ') && rule !== 'operator',
    );
    expect(changes.map(([route]) => route).sort()).toEqual(
      [
        'DELETE /access',
        'POST /access',
        'POST /api/rehearsals/preview',
        'POST /api/rehearsals/proposal',
      ].sort(),
    );
  });
});

/** Who gets past the gate, by the least role of a route. */
const PAST: Record<Rule, string[]> = {
  anyone: ['nobody', 'producer', 'viewer', 'operator'],
  viewer: ['viewer', 'operator'],
  operator: ['operator'],
};

describe('each route, by role', () => {
  it.each(Object.entries(RULES))('%s needs: %s', async (route, rule) => {
    for (const role of ['nobody', 'producer', 'viewer', 'operator'] as const) {
      const { status, text } = await ask(route, role === 'nobody' ? {} : bearer(tokens[role]));
      if (PAST[rule].includes(role)) expect([401, 403], `${role}: ${text}`).not.toContain(status);
      else expect(status, role).toBe(role === 'nobody' ? 401 : 403);
    }
  });

  it('lets nobody in by another spelling of a path', async () => {
    for (const path of [
      '/API/channels',
      '/api/channels/',
      '//api/channels',
      '/api//channels',
      '/%61pi/channels',
      '/api/./channels',
      '/api/channels?x=1',
      '/x/..%2fapi/channels',
    ])
      expect((await ask(`GET ${path}`)).status, path).toBe(401);
  });

  it('takes a cookie for a token, and the header before the cookie', async () => {
    const cookie = await signIn(tokens.viewer);
    expect((await ask('GET /api/channels', { cookie })).status).toBe(200);
    expect((await ask('POST /api/watches', { cookie })).status).toBe(403);
    expect((await ask('GET /api/channels', { cookie, ...bearer('wrong') })).status).toBe(401);
  });
});

describe('signing in', () => {
  it('sets a cookie that no script reads and no other site sends, and puts the token nowhere else', async () => {
    const { headers, text } = await ask('POST /access', {}, JSON.stringify({ token: tokens.operator }));
    expect(headers.get('set-cookie')).toMatch(
      new RegExp(`^foreshift-${server.port}=[\\w-]{43}; Path=/; Max-Age=2592000; HttpOnly; SameSite=Strict$`),
    );
    expect(JSON.parse(text)).toEqual({ tokens: true, role: 'operator', name: 'desk' });
    expect(JSON.stringify([...headers]) + text + JSON.stringify(log)).not.toContain(tokens.operator);
  });

  it('tells who is there, before and after, and ends when the person signs out', async () => {
    const who = async (cookie: string) => JSON.parse((await ask('GET /access', { cookie })).text);
    const cookie = await signIn(tokens.viewer);
    expect(await who('')).toEqual({ tokens: true, role: null, name: null });
    expect(await who(cookie)).toEqual({ tokens: true, role: 'viewer', name: 'hall' });
    const { headers } = await ask('DELETE /access', { cookie });
    expect(headers.get('set-cookie')).toMatch(/Max-Age=0/);
    expect(await who(cookie)).toEqual({ tokens: true, role: null, name: null });
  });

  it('asks how to sign in as RFC 6750 (3) says, and refuses a producer’s token in words', async () => {
    expect((await ask('GET /api/log')).headers.get('www-authenticate')).toBe('Bearer realm="foreshift"');
    expect((await ask('GET /api/log', bearer('x'))).headers.get('www-authenticate')).toContain(
      'error="invalid_token"',
    );
    const refused = await ask('POST /access', {}, JSON.stringify({ token: tokens.producer }));
    expect(refused.status).toBe(403);
    expect(refused.text).toContain('feeds channels');
  });

  it('turns away who guesses, but never who has a right one', async () => {
    const guess = () => ask('POST /access', {}, '{"token":"a guess"}');
    for (let n = 0; n < MOST_FAILURES; n++) expect((await guess()).status).toBe(401);
    const turnedAway = await guess();
    expect([turnedAway.status, turnedAway.headers.get('retry-after')]).toEqual([429, '60']);
    expect((await ask('GET /api/channels', bearer('a guess'))).status).toBe(429);
    await signIn(tokens.viewer);
    expect((await ask('GET /api/channels', bearer(tokens.viewer))).status).toBe(200);
  });

  it('writes who did something under their token’s name where they did not say', async () => {
    await ask('POST /api/notes', bearer(tokens.operator), '{"channel":null,"text":"x","by":""}');
    await ask('POST /api/notes', bearer(tokens.operator), '{"channel":null,"text":"y","by":"Ada"}');
    const notes = (await server.hub.store.logEntries({ newest: true, most: 100 })).filter(
      ({ kind }) => kind === 'note',
    );
    expect(notes.map(({ by }) => by)).toEqual(['desk', 'Ada']);
    expect(log).toContainEqual(
      expect.objectContaining({ event: 'request', path: '/api/notes', who: 'desk', status: 201 }),
    );
  });
});

describe('the WebSockets, by role', () => {
  it('let producers feed, and viewers and operators look', async () => {
    const statuses = async (open: typeof ingest) =>
      Promise.all(
        [{}, ...(['producer', 'viewer', 'operator'] as const).map((role) => bearer(tokens[role]))].map(
          async (headers) => (await open(headers as Record<string, string>)).status,
        ),
      );
    expect(await statuses(ingest)).toEqual([401, 101, 403, 403]);
    expect(await statuses(feed)).toEqual([401, 403, 101, 101]);
  });

  it('take a page’s cookie, but not from a page of another origin', async () => {
    const cookie = await signIn(tokens.viewer);
    const origin = `http://127.0.0.1:${server.port}`;
    expect((await feed({ cookie, origin })).status).toBe(101);
    expect(await feed({ cookie, origin: 'http://elsewhere.example' })).toMatchObject({
      status: 403,
      problem: { code: 'OTHER_ORIGIN' },
    });
    expect((await feed({ cookie, origin: 'null' })).status).toBe(403);
  });

  it('take no token from an address: it would stand in every log on the way', async () => {
    expect(
      (await upgrade(`/ingest?token=${tokens.producer}&access_token=${tokens.producer}`, {}, INGEST_PROTOCOL))
        .status,
    ).toBe(401);
    expect(JSON.stringify(log)).not.toContain(tokens.producer);
  });

  it('let a producer feed its own channels and no other', async () => {
    const { socket } = await ingest(bearer(tokens.bound));
    const replies: { error?: string; code?: string; window?: number }[] = [];
    socket.on('message', (data) => replies.push(JSON.parse(String(data))));
    socket.send(JSON.stringify({ channel: 'other', dt: 1, values: [1] }));
    await until(() => replies.length > 0);
    expect(replies[0]).toMatchObject({ code: 'NOT_ALLOWED', channel: 'other' });
    const greeted = await ingest(bearer(tokens.bound));
    const ended = closed(greeted.socket);
    greeted.socket.send(
      JSON.stringify({ hello: 1, run: 'r', channels: [{ channel: 'c' }, { channel: 'other' }] }),
    );
    expect(await ended).toMatchObject({
      code: 1008,
      reason: expect.stringContaining('may not feed "other"'),
    });
    expect(server.hub.channels.names()).toEqual([]);
    const own = await ingest(bearer(tokens.bound));
    own.socket.on('message', (data) => replies.push(JSON.parse(String(data))));
    own.socket.send(JSON.stringify({ hello: 1, run: 'r', channels: [{ channel: 'c' }] }));
    await until(() => replies.some(({ window }) => window !== undefined));
    expect(server.hub.channels.names()).toEqual(['c']);
  });

  it('hang up with 1008 on whoever’s token is withdrawn, within seconds and without a restart', async () => {
    const cookie = await signIn(tokens.viewer);
    const [page, rig, other] = [
      await feed({ cookie }),
      await ingest(bearer(tokens.producer)),
      await ingest(bearer(tokens.bound)),
    ];
    const ends = [closed(page.socket), closed(rig.socket)];
    withdrawToken(folder, 'hall');
    withdrawToken(folder, 'rig');
    for (const end of ends)
      expect(await end).toMatchObject({ code: 1008, reason: expect.stringContaining('withdrawn') });
    expect(other.socket.readyState).toBe(WebSocket.OPEN);
    expect((await ask('GET /api/channels', { cookie })).status).toBe(401);
    expect((await feed({ cookie })).status).toBe(401);
    const fresh = createToken(folder, { name: 'hall', role: 'viewer', channels: null }, new Date());
    expect((await ask('GET /api/channels', bearer(fresh))).status).toBe(200);
    expect((await ask('GET /api/channels', { cookie })).status).toBe(401);
  });
});

/** The status of a request whose first line is sent as it is. */
const raw = (target: string, host = `127.0.0.1:${server.port}`) =>
  new Promise<{ status: number; text: string }>((resolve, reject) => {
    const socket = connectTcp(server.port, '127.0.0.1', () =>
      socket.write(`GET ${target} HTTP/1.1\r\nHost: ${host}\r\nConnection: close\r\n\r\n`),
    );
    let text = '';
    socket.on('data', (data) => (text += data));
    socket.on('end', () => resolve({ status: Number(text.slice(9, 12)), text }));
    socket.on('error', reject);
  });

describe('the files that are served', () => {
  it.each([
    '/../package.json',
    '/../../package.json',
    '/%2e%2e/package.json',
    '/%2e%2e%2fpackage.json',
    '/..%5cpackage.json',
    '/..%255c..%255cpackage.json',
    '/%252e%252e/package.json',
    '/assets/../../../package.json',
    '/assets/%2e%2e/%2e%2e/server/commands/main.js',
    '//etc/passwd',
    '/etc/passwd',
    '/file:///etc/passwd',
    '/....//....//package.json',
    '/%00',
    '/index.html%00.js',
    '/.git/config',
    '/%c0%ae%c0%ae/package.json',
  ])('are the pages’ own, whatever the path: %s', async (target) => {
    const { status, text } = await raw(target);
    expect([400, 401, 403, 404]).toContain(status);
    expect(text).not.toMatch(/"dependencies"|root:|#!\/usr|repositoryformatversion/);
  });

  it('are not given out under a name that is not this server’s', async () => {
    expect((await raw('/', 'evil.example')).status).toBe(403);
    expect((await raw('/', 'localhost.evil.example')).status).toBe(403);
    expect((await raw('/', '10.0.0.7')).status).toBe(403);
  });
});
