import { mkdtemp, rm, writeFile } from 'node:fs/promises';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, expect, it } from 'vitest';
import { sendDemoPast } from '../../../server/commands/demoPast.ts';
import { startServer } from '../../../server/gateway/server.ts';
import { modelFromJson } from '../../../server/model/modelFile.ts';
import { openStore } from '../../../server/store/openStore.ts';
import { createWatch } from '../../../server/watch/watch.ts';

const folder = await mkdtemp(join(tmpdir(), 'foreshift-past-'));
const server = await startServer({
  port: 0,
  listen: '127.0.0.1',
  store: await openStore(join(folder, 'data'), { commitEvery: 0.01 }),
  demo: true,
  program: 'test',
  createWatch,
  readModel: modelFromJson,
  warn: (text) => expect.fail(text),
});
afterAll(async () => {
  await server.close();
  await rm(folder, { recursive: true, force: true });
});

it('makes a recording the past of its channel, ending shortly before now, nothing missing', async () => {
  const file = join(folder, 'loop-a.csv');
  const rows = Array.from({ length: 2500 }, (_, i) => `${(0.4 * i).toFixed(1)},${i % 7}`);
  await writeFile(file, ['time,Loop A (K)', ...rows].join('\n'));
  const now = 1.8e9;
  await sendDemoPast(`ws://127.0.0.1:${server.port}/ingest`, [file], now);
  const { times, values } = await server.hub.store.samplesBetween('Loop A', 0, now);
  expect(values).toEqual(Float64Array.from(rows, (_, i) => i % 7));
  expect(times.at(-1)).toBe(now - 170);
  expect(times[0]).toBeCloseTo(now - 170 - 0.4 * 2499, 5);
  expect(server.hub.channels.state('Loop A', server.hub.now())).toMatchObject({
    holes: 0,
    gaps: 0,
    unit: 'K',
  });
});
