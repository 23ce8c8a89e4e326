import { execFileSync } from 'node:child_process';
import { rmSync, statfsSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { afterEach, expect, it } from 'vitest';
import { createProducer } from '../../server/commands/producer.ts';
import { type RunningServer, startServer } from '../../server/gateway/server.ts';
import { modelFromJson } from '../../server/model/modelFile.ts';
import { openStore } from '../../server/store/openStore.ts';
import type { StoreError } from '../../server/store/storeError.ts';
import { createStoreThread } from '../../server/store/storeThread.ts';
import { createWatch } from '../../server/watch/watch.ts';
import type { ChannelState } from '../../shared-types/channel.ts';
import type { FeedMessage } from '../../shared-types/feed.ts';
import { api, connect, swing, swingModelJson, until } from '../server/gateway/harness.ts';
import { frame, temporaryFolder } from '../server/store/temporaryFolder.ts';
import { createListener } from './builtServer.ts';
import { missingAndTwice, report, WHOLE } from './report.ts';

const servers: RunningServer[] = [];
afterEach(async () => {
  for (const server of servers.splice(0)) await server.close();
});

const SAMPLES = 2000;
const LARGEST_BYTES = 700_000;
/** stored beforehand; taking it away makes room again */
const BALLAST_BYTES = 300_000;

/** noise, which takes room on disk as it is */
const valuesOf = (seq: number): number[] =>
  Array.from({ length: SAMPLES }, (_, i) => {
    const noise = Math.sin((seq * SAMPLES + i) * 12.9898) * 43758.5453;
    return noise - Math.floor(noise);
  });

async function cramped() {
  const store = openStore(temporaryFolder(), { commitEvery: 0.01, largestBytes: LARGEST_BYTES });
  await store.saveRehearsal({ id: '1', state: '{"state":"stopped"}', result: new Uint8Array(BALLAST_BYTES) });
  const server = await startServer({
    port: 0,
    listen: '127.0.0.1',
    store,
    demo: false,
    program: 'foreshift test',
    createWatch,
    readModel: modelFromJson,
    warn: () => {},
  });
  servers.push(server);
  return { server, store };
}

const HELLO = { hello: 1, run: 'r', channels: [{ channel: 'c', interval: 0.001 }] };

it('on a full disk nothing is acknowledged that is not stored, and with room again the run goes on without a hole', async () => {
  const { server, store } = await cramped();
  const first = await connect(server.port);
  first.say(HELLO);
  await first.heard((reply) => 'window' in reply);
  const send = (line: typeof first, seq: number) =>
    line.say({ channel: 'c', seq, t0: seq * 2, dt: 0.001, values: valuesOf(seq) });
  // three at a time, so that some are on disk before it is full
  for (let seq = 0; seq < 60 && first.replies.every((reply) => !('code' in reply)); seq += 3) {
    for (let i = seq; i < seq + 3; i++) send(first, i);
    await first.heard((reply) => 'code' in reply || ('ack' in reply && reply.ack === seq + 2));
  }
  expect((await first.closed).code).toBe(1013);
  const acknowledged = Math.max(-1, ...first.replies.flatMap((reply) => ('ack' in reply ? [reply.ack] : [])));
  expect([acknowledged > 0, acknowledged < 59]).toEqual([true, true]);
  expect(first.replies.some((reply) => 'code' in reply && reply.code === 'NOT_STORED')).toBe(true);
  expect((await store.run('c', 'r')).next).toBe(acknowledged + 1);
  expect((await api<{ trouble: string }>(server.port, '/health')).json.trouble).toContain(
    'not being recorded',
  );

  await store.removeRehearsal('1');
  const again = await connect(server.port);
  again.say(HELLO);
  const answer = await again.heard((reply) => 'resume' in reply);
  expect(answer).toEqual({ resume: acknowledged + 1, channel: 'c' });
  await again.heard((reply) => 'window' in reply);
  const last = acknowledged + 6;
  for (let seq = acknowledged + 1; seq <= last; seq++) send(again, seq);
  await again.heard((reply) => 'ack' in reply && reply.ack === last);
  const { values } = await store.samplesFrom('c', 0, 1e6);
  expect(values).toEqual(
    Float64Array.from(Array.from({ length: last + 1 }, (_, seq) => valuesOf(seq)).flat()),
  );
  const [channel] = (await api<ChannelState[]>(server.port, '/api/channels')).json;
  expect(channel).toMatchObject({ holes: 0, samples: (last + 1) * SAMPLES });
});

it('a producer that keeps what is not acknowledged loses nothing to a disk that was full for a while', async () => {
  const { server, store } = await cramped();
  const refusals = new Set<string>();
  const producer = createProducer({
    to: `ws://127.0.0.1:${server.port}/ingest`,
    run: 'r',
    channels: [{ channel: 'c', interval: 0.001 }],
    onState: (state) => {
      if (state.kind === 'refused') refusals.add(state.code);
      // room is made once the disk was full
      if (state.kind === 'refused' && state.code === 'NOT_STORED') void store.removeRehearsal('1');
    },
  });
  let seq = 0;
  for (; seq < 24; seq++)
    producer.send('c', { t0: seq * 2, dt: 0.001, values: Float64Array.from(valuesOf(seq)) });
  await producer.idle();
  await producer.close();
  expect([...refusals]).toEqual(['NOT_STORED']);
  const { values } = await store.samplesFrom('c', 0, 1e6);
  expect(values).toEqual(Float64Array.from(Array.from({ length: seq }, (_, i) => valuesOf(i)).flat()));
});

it('while the disk is full the page says so and warnings go on; with room again they are in the log', async () => {
  const { server, store } = await cramped();
  const post = (path: string, body: string) =>
    fetch(`http://127.0.0.1:${server.port}${path}`, { method: 'POST', body });
  await post('/api/models', swingModelJson());
  await post('/api/watches', JSON.stringify({ model: 'swing', channels: ['c'] }));
  const troubles: (string | null)[] = [];
  const told = new Set<number>();
  const leave = createListener(
    () => server.port,
    (message: FeedMessage) => {
      if (message.kind === 'trouble') troubles.push(message.text);
      if (message.kind === 'warning') told.add(message.warning.at);
    },
  );
  const producer = createProducer({
    to: `ws://127.0.0.1:${server.port}/ingest`,
    run: 'r',
    channels: [{ channel: 'c', interval: 0.1 }, { channel: 'ballast' }],
  });
  const [swingFrames, each] = [40, 200];
  const fill = async () => {
    for (let seq = 0; !troubles.some((text) => text !== null); seq++) {
      producer.send('ballast', { t0: seq * 2, dt: 0.001, values: Float64Array.from(valuesOf(seq)) });
      await new Promise((resolve) => setTimeout(resolve, 10));
    }
  };
  const swingFrom = (seq: number) =>
    producer.send('c', { t0: 0.1 * each * seq, dt: 0.1, values: swing(each * seq, each) });
  for (let seq = 0; seq < swingFrames / 2; seq++) swingFrom(seq);
  await until(() => told.size > 0);
  await fill();
  const before = told.size;
  for (let seq = swingFrames / 2; seq < swingFrames; seq++) swingFrom(seq);
  await until(() => told.size > before + 5);
  expect(troubles.at(-1)).toContain('not being recorded');
  expect((await api(server.port, '/health')).status).toBe(200);

  await store.removeRehearsal('1');
  await producer.idle();
  await until(async () => (await store.warnings({})).length >= told.size && troubles.at(-1) === null);
  await producer.close();
  leave();
  const logged = (await store.warnings({})).map(({ at }) => at);
  const { values } = await store.samplesFrom('c', 0, 1e6);
  report({
    tried: 'a full disk, watched',
    acknowledged: swingFrames * each,
    lost: swingFrames * each - values.length,
    twice: logged.length - new Set(logged).size,
    'warnings told while it was full': told.size - before,
    'told and not in the log': [...told].filter((at) => !logged.includes(at)).length,
  });
  expect(values).toEqual(swing(0, swingFrames * each));
  expect(new Set(logged)).toEqual(told);
});

/** A file system of its own, of so many KiB, where this may be had: Linux, as root, in the whole suite. */
const mayMount = WHOLE && process.platform === 'linux' && process.getuid?.() === 0;
function mounted(kibibytes: number): { place: string; leave: () => void } {
  const place = temporaryFolder();
  execFileSync('mount', ['-t', 'tmpfs', '-o', `size=${kibibytes}k`, 'tmpfs', place]);
  return { place, leave: () => void execFileSync('umount', ['-l', place]) };
}

/** Fills a small file system three times over at different moments of a commit; frames acknowledged, and samples lost of them. */
async function fillUp(kibibytes: number): Promise<{ acknowledged: number; lost: number }> {
  const { place, leave } = mounted(kibibytes);
  try {
    const ballast = join(place, 'ballast');
    writeFileSync(ballast, new Uint8Array(kibibytes * 256));
    const store = openStore(join(place, 'data'), { commitEvery: 0.002 });
    let seq = 0;
    const send = async () => {
      const values = Float64Array.from({ length: 500 }, (_, i) => seq * 500 + i);
      await store.appendFrames([frame(seq, seq * 10, values)]);
      seq++;
    };
    for (let refusals = 0; refusals < 3; )
      await send().catch(({ code }: StoreError) => {
        expect(code).toBe('FULL');
        refusals++;
      });
    rmSync(ballast);
    await send();
    const { values } = await store.samplesFrom('A', 0, 1e7);
    await store.close();
    const { lost } = missingAndTwice(values, seq * 500);
    expect(values).toEqual(Float64Array.from(values, (_, i) => i));
    return { acknowledged: seq, lost };
  } finally {
    leave();
  }
}

if (mayMount)
  it('a small file system that fills up at any moment costs nothing that was acknowledged', async () => {
    let [acknowledged, lost] = [0, 0];
    for (let kibibytes = 600; kibibytes < 1800; kibibytes += 37) {
      const cost = await fillUp(kibibytes);
      acknowledged += cost.acknowledged;
      lost += cost.lost;
    }
    report({ tried: 'a file system of 0.6 to 1.8 MB filled up, 33 sizes', acknowledged, lost, twice: 0 });
    expect(lost).toBe(0);
  });

if (mayMount)
  it('a store on a disk without a byte left says so when it is opened', async () => {
    const { place, leave } = mounted(2000);
    try {
      const data = join(place, 'data');
      await openStore(data, { commitEvery: 0.002 }).close();
      const { bfree, bsize } = statfsSync(place);
      writeFileSync(join(place, 'ballast'), new Uint8Array(bfree * bsize));
      await expect(createStoreThread(data, { commitEvery: 0.002 })).rejects.toMatchObject({ code: 'FULL' });
    } finally {
      leave();
    }
  });
