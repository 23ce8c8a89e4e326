/** Frames that come twice, in another order, with other content; channels whose time jumps; a server whose clock jumps. */
import fc from 'fast-check';
import { expect, it } from 'vitest';
import { startServer } from '../../server/gateway/server.ts';
import { modelFromJson } from '../../server/model/modelFile.ts';
import { openStore } from '../../server/store/openStore.ts';
import { createWatch } from '../../server/watch/watch.ts';
import type { ChannelState } from '../../shared-types/channel.ts';
import type { IngestReply } from '../../shared-types/ingest.ts';
import { api, connect, type Line, serve, swing, swingModelJson } from '../server/gateway/harness.ts';
import { temporaryFolder } from '../server/store/temporaryFolder.ts';
import { missingAndTwice, report, WHOLE } from './report.ts';

const SEED = 20_261_201;
const FRAME = 4;

const frame = (seq: number) => ({
  channel: 'c',
  seq,
  t0: seq,
  dt: 0.1,
  values: Array.from({ length: FRAME }, (_, i) => FRAME * seq + i),
});

/** The frame numbers of a schedule: 0 … n − 1 with repetitions, neighbours changed about, and numbers left out. */
const schedule = fc
  .array(
    fc.record({
      again: fc.nat({ max: 3 }),
      swap: fc.integer({ min: 0, max: 9 }),
      out: fc.integer({ min: 0, max: 19 }),
    }),
    { minLength: 5, maxLength: 60 },
  )
  .map((steps) => {
    const seqs = steps.flatMap(({ again, out }, seq) =>
      out === 0 ? [] : Array(again === 0 ? 2 : 1).fill(seq),
    );
    steps.forEach(({ swap }, i) => {
      if (swap === 0 && i + 1 < seqs.length) [seqs[i], seqs[i + 1]] = [seqs[i + 1], seqs[i]];
    });
    return seqs as number[];
  });

async function greeted(port: number, run: string): Promise<Line> {
  const line = await connect(port);
  line.say({ hello: 1, run, channels: [{ channel: 'c' }] });
  await line.heard((reply) => 'window' in reply);
  return line;
}

it('frames twice and in another order: what is acknowledged without an error is there once and in order', async () => {
  let [acknowledged, lost, twice, refused, runs] = [0, 0, 0, 0, 0];
  await fc.assert(
    fc.asyncProperty(schedule, async (seqs) => {
      const folder = temporaryFolder();
      const server = await serve(folder);
      const line = await greeted(server.port, 'r');
      for (const seq of seqs) line.say(frame(seq));
      const last = Math.max(-1, ...seqs) + 1;
      // one more than all, to know that all were heard
      line.say(frame(last));
      await line.heard((reply) => 'ack' in reply && reply.ack >= last);
      await server.close();
      const errors = new Set(line.replies.flatMap((reply) => ('error' in reply ? [reply.seq] : [])));
      const promised = [...new Set([...seqs, last])].filter((seq) => !errors.has(seq));
      const store = openStore(folder, { commitEvery: 0.01 });
      const { values, times } = await store.samplesFrom('c', 0, 1e6);
      await store.close();
      const there = new Set([...values].map((value) => Math.floor(value / FRAME)));
      expect(times.every((time, i) => i === 0 || time > times[i - 1]!)).toBe(true);
      acknowledged += promised.length;
      lost += promised.filter((seq) => !there.has(seq)).length;
      twice += missingAndTwice(values, FRAME * (last + 1)).twice;
      refused += errors.size;
      runs++;
      expect(promised.filter((seq) => !there.has(seq))).toEqual([]);
    }),
    // a run that begins with a hole, too
    { seed: SEED, numRuns: WHOLE ? 300 : 25, examples: [[[4, 4, 3]]] },
  );
  report({ tried: `frames twice and out of order, ${runs} runs`, acknowledged, lost, twice, refused });
  expect([lost, twice]).toEqual([0, 0]);
  expect(refused).toBeGreaterThan(0);
}, 300_000);

it('a channel whose time jumps ahead and back is recorded with a gap, refused in words, and watched again', async () => {
  const folder = temporaryFolder();
  const server = await serve(folder);
  const post = (path: string, body: string) =>
    fetch(`http://127.0.0.1:${server.port}${path}`, { method: 'POST', body });
  const line = await greeted(server.port, 'r');
  await post('/api/models', swingModelJson());
  await post('/api/watches', JSON.stringify({ model: 'swing', channels: ['c'] }));
  const at = (seq: number, t0: number) =>
    line.say({ channel: 'c', seq, t0, dt: 0.1, values: [...swing(seq * 100, 100)] });
  const heard = (test: (reply: IngestReply) => boolean) => line.heard(test);
  const year = 365 * 86_400;
  const starts = [1e9, 1e9 + 10, 1e9 + 20 + year, 1e9 + 30, 1e9 - year, 1e9 + 30 + year, 1e9 + 40 + year];
  starts.forEach((t0, seq) => void at(seq, t0));
  await heard((reply) => 'ack' in reply && reply.ack === starts.length - 1);
  const refused = line.replies.flatMap((reply) => ('error' in reply ? [[reply.code, reply.seq]] : []));
  expect(refused).toEqual([
    ['TIME_BACKWARDS', 3],
    ['TIME_BACKWARDS', 4],
  ]);
  const [channel] = (await api<ChannelState[]>(server.port, '/api/channels')).json;
  expect(channel).toMatchObject({ samples: 500, gaps: 1, newest: 1e9 + 49.9 + year });
  const [watch] = (await api(server.port, '/api/watches')).json;
  expect(watch).toMatchObject({ sight: { kind: 'seeing' } });
  const recordings = (await api(server.port, '/api/recordings')).json;
  expect(recordings.map(({ samples }) => samples)).toEqual([200, 300]);
  report({
    tried: 'channel time a year ahead and back',
    acknowledged: 5,
    lost: 0,
    twice: 0,
    refused: refused.length,
  });
});

it("a server's clock that jumps leaves samples stamped on arrival in order, and the server serving", async () => {
  const folder = temporaryFolder();
  let [offset, said] = [1.7e9, 0];
  const server = await startServer({
    port: 0,
    listen: '127.0.0.1',
    store: openStore(folder, { commitEvery: 0.01 }),
    demo: false,
    program: 'foreshift test',
    createWatch,
    readModel: modelFromJson,
    warn: () => void said++,
    clock: () => ({ server: offset + performance.now() / 1000, monotonic: performance.now() / 1000 }),
  });
  const line = await connect(server.port);
  let sent = 0;
  for (const jump of [0, 3600, -7200, 1e7, -1e7, 0]) {
    offset += jump;
    for (let i = 0; i < 10; i++) line.say({ channel: 'plain', values: [sent++, sent++], dt: 0.05 });
    await new Promise((resolve) => setTimeout(resolve, 60));
  }
  await new Promise((resolve) => setTimeout(resolve, 100));
  const refused = line.replies.filter((reply) => 'error' in reply).length;
  expect((await api(server.port, '/health')).status).toBe(200);
  await server.close();
  const store = openStore(folder, { commitEvery: 0.01 });
  const { times, values } = await store.samplesFrom('plain', 0, 1e6);
  await store.close();
  expect(times.every((time, i) => i === 0 || time > times[i - 1]!)).toBe(true);
  const { twice } = missingAndTwice(values, sent);
  report({ tried: "jumps of the server's clock", acknowledged: 0, lost: 0, twice, refused });
  expect(twice).toBe(0);
  // each sample is there, or was refused in words with its frame
  expect(values.length + 2 * refused).toBe(sent);
  expect(said).toBe(0);
});
