import { writeFile } from 'node:fs/promises';
import { join } from 'node:path';
import { setTimeout as sleep } from 'node:timers/promises';
import { afterEach, expect, it } from 'vitest';
import { createProducer } from '../../server/commands/producer.ts';
import { openStore } from '../../server/store/openStore.ts';
import type { Happening } from '../../server/watch/types.ts';
import { createWatch } from '../../server/watch/watch.ts';
import type { ChannelState } from '../../shared-types/channel.ts';
import type { FeedMessage } from '../../shared-types/feed.ts';
import type { Warning } from '../../shared-types/warning.ts';
import type { WatchState } from '../../shared-types/watch.ts';
import { api, swing, swingModel, swingModelJson, until } from '../server/gateway/harness.ts';
import { temporaryFolder } from '../server/store/temporaryFolder.ts';
import { type BuiltServer, builtServer, createListener } from './builtServer.ts';
import { chance, report, WHOLE } from './report.ts';

const KILLS = WHOLE ? 100 : 4;
/** samples of a frame of the watched channel, and of each channel of the load beside it */
const FRAME = 20;
const LOAD_FRAME = 1000;
const LOAD = ['load 1', 'load 2'];
const MILLISECONDS = 20;
const SEED = 20_261_201;

let server: BuiltServer | null = null;
let leave: (() => void) | null = null;
afterEach(async () => {
  leave?.();
  await server?.stop('SIGKILL');
});

/** what sample i of a channel of the load is: exact in float64, different for each sample */
const loadValue = (place: number, i: number) => place * 2 ** 40 + i;

function neverKilled(frames: number): Happening[] {
  const model = swingModel();
  const { rule, regime } = model;
  const watch = createWatch({ model, channels: ['c'], rule, regime, regimeChannel: null });
  const happenings: Happening[] = [];
  watch.push({ channel: 'c', t0: 0, dt: 0.1, times: null, values: swing(0, FRAME * frames) }, happenings);
  return happenings;
}

/** Sends to all channels until it is told to stop; how many frames each has sent. */
function stream(port: number) {
  const to = `ws://127.0.0.1:${port}/ingest`;
  const limit = 1_000_000;
  const channels = [{ channel: 'c', interval: 0.1 }];
  const watched = createProducer({ to, run: 'the only run', channels, limit });
  const load = createProducer({ to, run: 'load', channels: LOAD.map((channel) => ({ channel })), limit });
  let frames = 0;
  const timer = setInterval(() => {
    watched.send('c', { t0: 0.1 * FRAME * frames, dt: 0.1, values: swing(FRAME * frames, FRAME) });
    LOAD.forEach((channel, place) => {
      const first = frames * LOAD_FRAME;
      const values = Float64Array.from({ length: LOAD_FRAME }, (_, i) => loadValue(place, first + i));
      load.send(channel, { t0: first * 0.001, dt: 0.001, values });
    });
    frames++;
  }, MILLISECONDS);
  return async () => {
    clearInterval(timer);
    await Promise.all([watched.idle(), load.idle()]);
    await Promise.all([watched.close(), load.close()]);
    return frames;
  };
}

/** Kills the server at moments all over its life, some before it serves again; in how many starts a watch went blind. */
async function killAgainAndAgain(killed: BuiltServer): Promise<number> {
  const random = chance(SEED);
  let [blind, sawBefore] = [0, false];
  const taken = async () =>
    (await api<ChannelState[]>(killed.port, '/api/channels')).json.map(({ samples }) => samples);
  for (let kill = 0; kill < KILLS; kill++) {
    // the producers are back and send: every kill meets frames under way
    const before = await taken();
    await until(async () => (await taken()).every((samples, i) => samples > (before[i] ?? 0)));
    await sleep(500 * random() ** 2);
    await killed.stop('SIGKILL');
    if (random() < 0.2 && ++kill < KILLS) {
      killed.spawn();
      await sleep(50 + 500 * random());
      await killed.stop('SIGKILL');
    }
    await killed.start();
    const [watch] = (await api<WatchState[]>(killed.port, '/api/watches')).json;
    if (sawBefore && watch!.sight.kind !== 'seeing') blind++;
    sawBefore ||= watch!.sight.kind === 'seeing';
  }
  expect(sawBefore).toBe(true);
  return blind;
}

/** Ids under which a page was told each warning, by its `at`. */
function listenForWarnings(port: () => number) {
  const told = new Map<number, Set<number>>();
  const hear = ({ at, id }: Warning) => told.set(at, (told.get(at) ?? new Set()).add(id));
  leave = createListener(port, (message: FeedMessage) => {
    if (message.kind === 'warning') hear(message.warning);
    if (message.kind === 'welcome') for (const warning of message.welcome.warnings) hear(warning);
  });
  return told;
}

it(`killed ${KILLS} times under load, loses no acknowledged sample, goes blind never and warns as if never killed`, async () => {
  const folder = temporaryFolder();
  await writeFile(join(folder, 'model.json'), swingModelJson());
  server = builtServer(folder, ['--model', join(folder, 'model.json'), '--channel', 'c']);
  await server.start();
  const { port } = server;
  const told = listenForWarnings(() => port);
  const stop = stream(port);
  const blind = await killAgainAndAgain(server);
  // long enough for the page to be there again
  await sleep(1500);
  const frames = await stop();
  expect(await server.stop('SIGTERM')).toBe(0);
  expect(server.complaints()).toBe('');

  const store = openStore(join(folder, 'data'), { commitEvery: 0.01 });
  expect(store.notices).toEqual([]);
  const { values } = await store.samplesFrom('c', 0, 1e9);
  const loads = await Promise.all(LOAD.map((channel) => store.samplesFrom(channel, 0, 1e9)));
  const warnings = await store.warnings({ channel: 'c' });
  const switches = await store.switches({ channel: 'c' });
  await store.close();
  const ids = new Set(warnings.map(({ at }) => at));
  report({
    tried: `kill -9, ${KILLS} times`,
    acknowledged: frames * (FRAME + LOAD.length * LOAD_FRAME),
    lost:
      frames * FRAME -
      values.length +
      loads.reduce((sum, one) => sum + frames * LOAD_FRAME - one.values.length, 0),
    twice: [...told.values()].filter((one) => one.size > 1).length,
    warnings: warnings.length,
    'told and not in the log': [...told.keys()].filter((at) => !ids.has(at)).length,
    'blind after a start': blind,
  });
  expect(values).toEqual(swing(0, FRAME * frames));
  loads.forEach((one, place) => {
    expect(one.values.length).toBe(frames * LOAD_FRAME);
    expect(one.values.every((value, i) => value === loadValue(place, i))).toBe(true);
  });
  expect(blind).toBe(0);
  expect([...told.keys()].filter((at) => !ids.has(at))).toEqual([]);
  expect(told.size).toBeGreaterThan(5);
  expect([...told.values()].filter((one) => one.size > 1)).toEqual([]);
  sameAsNeverKilled(frames, warnings, switches);
}, 3_600_000);

function sameAsNeverKilled(frames: number, warnings: Warning[], switches: { at: number }[]): void {
  const expected = neverKilled(frames);
  const said = (kind: Happening['kind']) => expected.filter((happening) => happening.kind === kind);
  const at = (list: { at?: number }[]) => list.map((each) => each.at);
  // Frames end at other multiples of 0.1 than one long frame, by rounding alone.
  const close = (left: (number | undefined)[], right: (number | undefined)[]) => {
    expect(left).toHaveLength(right.length);
    left.forEach((time, i) => void expect(time).toBeCloseTo(right[i]!, 6));
  };
  close(at(warnings), at(said('warning') as { at: number }[]));
  close(at(switches), at(said('switch') as { at: number }[]));
  const outcomes = said('graded') as Extract<Happening, { kind: 'graded' }>[];
  expect(warnings.slice(0, outcomes.length).map(({ outcome }) => outcome)).toEqual(
    outcomes.map(({ outcome }) => outcome),
  );
}
