import { join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { afterEach, expect, it } from 'vitest';
import { type RunningServer, startServer } from '../../../../server/gateway/server.ts';
import { modelFromJson } from '../../../../server/model/modelFile.ts';
import { openStore } from '../../../../server/store/openStore.ts';
import { createWatch } from '../../../../server/watch/watch.ts';
import type { ChannelState } from '../../../../shared-types/channel.ts';
import type { PlayState } from '../../../../shared-types/rehearsal.ts';
import type { LogEntry } from '../../../../shared-types/warning.ts';
import { temporaryFolder } from '../../store/temporaryFolder.ts';
import { api, serve, swing, until } from '../harness.ts';

const MAIN = fileURLToPath(new URL('../../../../dist/server/commands/main.js', import.meta.url));
const servers: RunningServer[] = [];
afterEach(async () => {
  for (const server of servers.splice(0)) await server.close();
});

/** A server that can play, over a folder with a minute of the swing stored as "c". */
async function player(): Promise<RunningServer> {
  const folder = join(temporaryFolder(), 'data');
  const store = openStore(folder, { commitEvery: 0.01 });
  await store.saveChannel({ channel: 'c', unit: 'V', label: '', interval: 0.1, low: null, high: null });
  const frame = { channel: 'c', run: 'r', seq: 0, digest: 1, t0: 1.7e9, dt: 0.1, times: null };
  await store.appendFrames([{ ...frame, values: swing(0, 600) }]);
  const server = await startServer({
    port: 0,
    listen: '127.0.0.1',
    store,
    demo: false,
    program: 'foreshift test',
    createWatch,
    readModel: modelFromJson,
    warn: () => {},
    player: { program: [process.execPath, MAIN], data: folder },
  });
  servers.push(server);
  return server;
}

const plays = async (port: number) => (await api<PlayState[]>(port, '/api/plays')).json;
const channelOf = async (port: number, name: string) =>
  (await api<ChannelState[]>(port, '/api/channels')).json.find(({ channel }) => channel === name);

it('plays a recording through the real ingest to a channel of its own', async () => {
  const { port } = await player();
  const before = Date.now() / 1000;
  const made = await api<PlayState>(port, '/api/plays', { recording: 'stored:c/1', pace: 'max' });
  expect(made).toMatchObject({
    status: 202,
    json: { recording: 'stored:c/1', as: ['c, played'], pace: 'max', state: 'running', fault: null },
  });
  await until(async () => (await plays(port))[0]!.state !== 'running');
  expect(await plays(port)).toMatchObject([{ id: made.json.id, state: 'done', fault: null }]);
  const played = await channelOf(port, 'c, played');
  expect(played).toMatchObject({ samples: 600, unit: 'V', label: 'c of stored:c/1' });
  // faster than the clock it has elapsed time, spaced as it was recorded
  expect([played!.first, played!.newest]).toEqual([0, expect.closeTo(59.9, 6)]);
  // at the pace of the clock it has present times: on a channel of its own again
  const next = await api<PlayState>(port, '/api/plays', { recording: 'stored:c', pace: 1 });
  expect(next.json.as).toEqual(['c, played 2']);
  await until(async () => ((await channelOf(port, 'c, played 2'))?.samples ?? 0) > 2);
  expect((await channelOf(port, 'c, played 2'))!.first!).toBeGreaterThan(before - 1);
  expect((await api<PlayState>(port, `/api/plays/${next.json.id}/stop`, {})).json.state).toBe('stopped');
  await until(async () => (await channelOf(port, 'c, played 2'))?.connected === false);
  const texts = (await api<LogEntry[]>(port, '/api/log')).json.filter(({ kind }) => kind === 'play');
  expect(texts.map(({ text }) => text)).toEqual([
    'stored:c/1: played as "c, played", pace max',
    'stored:c/1: played to the end as "c, played"',
    'stored:c: played as "c, played 2", pace 1',
    'stored:c: stopped',
  ]);
});

it('plays a few at a time and stops them all with the server', async () => {
  const server = await player();
  for (let i = 0; i < 4; i++)
    expect((await api(server.port, '/api/plays', { recording: 'stored:c', as: `copy ${i}` })).status).toBe(
      202,
    );
  expect(await api(server.port, '/api/plays', { recording: 'stored:c' })).toMatchObject({
    status: 429,
    json: { code: 'TOO_MANY' },
  });
  await until(async () => ((await channelOf(server.port, 'copy 3'))?.samples ?? 0) > 0);
  const closing = performance.now();
  await server.close();
  expect(performance.now() - closing).toBeLessThan(5000);
});

it('says in a sentence what cannot be played', async () => {
  const { port } = await player();
  const post = (body: object) => api<{ code: string }>(port, '/api/plays', body);
  expect(await post({ recording: 'stored:nothing' })).toMatchObject({
    status: 404,
    json: { code: 'NO_RECORDING' },
  });
  expect(await post({ recording: '/etc/passwd' })).toMatchObject({
    status: 404,
    json: { code: 'NO_RECORDING' },
  });
  for (const pace of ['0', '-1', 'fast', '1e3']) {
    expect(await post({ recording: 'stored:c', pace }), pace).toMatchObject({ status: 400 });
  }
  const late = await post({ recording: 'stored:c/7' });
  expect(late.status).toBe(202);
  await until(async () => (await plays(port))[0]!.state === 'failed');
  expect((await plays(port))[0]!.fault).toContain('stored:c/7 is not stored; c has 1 recordings');
  expect(await api(port, '/api/plays/99/stop', {})).toMatchObject({ status: 404 });
});

it('cannot be done by a server that was given no player', async () => {
  const { port } = await serve(temporaryFolder());
  expect(await api(port, '/api/plays', { recording: 'stored:c' })).toMatchObject({
    status: 501,
    json: { code: 'NO_PLAYER' },
  });
});
