/** The size ceiling under a stream that would exceed it many times over: held, without a wait for whoever sends. */
import { readdirSync, statSync } from 'node:fs';
import { join } from 'node:path';
import { expect, it } from 'vitest';
import { createKeeping } from '../../server/gateway/watches/keeping.ts';
import { createStoreThread } from '../../server/store/storeThread.ts';
import { frame, temporaryFolder } from '../server/store/temporaryFolder.ts';
import { report, WHOLE } from './report.ts';

const MEBIBYTE = 1024 * 1024;
const CEILING = 64 * MEBIBYTE;
/** bytes that arrive altogether */
const STREAM = (WHOLE ? 20 : 1.8) * CEILING;
/** a million samples a second: frames of so many, so many at a time */
const SAMPLES = 50_000;
const TOGETHER = 4;
const MILLISECONDS = 200;

const bytesIn = (folder: string) =>
  readdirSync(folder).reduce((sum, name) => sum + statSync(join(folder, name)).size, 0);

it('is held to its bytes while several times as much arrives, and no append waits long for it', async () => {
  const folder = temporaryFolder();
  const store = await createStoreThread(folder, { commitEvery: 0.05 });
  const began = performance.now();
  const serverTime = () => 1e9 + (performance.now() - began) / 1000;
  const warned: string[] = [];
  const keeping = createKeeping({
    store,
    settings: { keepFor: null, largestStore: CEILING, recordingGap: 60 },
    watches: { model: () => null },
    journal: { log: () => {} },
    serverTime,
    warn: (text) => warned.push(text),
  });
  const ticking = setInterval(() => keeping.tick(), 1000);
  /** milliseconds to a commit before there is anything to prune, and while there is */
  const before: number[] = [];
  const during: number[] = [];
  let [largest, sent] = [0, 0];
  const values = Float64Array.from({ length: SAMPLES }, (_, i) => Math.sin(i));
  for (let seq = 0; sent < STREAM; ) {
    const asked = performance.now();
    const together = Array.from({ length: TOGETHER }, () => {
      const [channel, run] = [seq % 2 === 0 ? 'A' : 'B', `${seq % 2}`];
      return store.appendFrames([frame(seq, seq++ * 50, values, { dt: 0.001, channel, run })]);
    });
    const due = new Promise((resolve) => setTimeout(resolve, MILLISECONDS));
    await Promise.all(together);
    (sent < CEILING / 2 ? before : during).push(performance.now() - asked);
    await due;
    sent += TOGETHER * SAMPLES * 8;
    largest = Math.max(largest, bytesIn(folder));
  }
  clearInterval(ticking);
  await new Promise((resolve) => setTimeout(resolve, 100));
  await keeping.close();
  const [a, b] = await store.channels();
  const newest = await store.samplesBetween('A', a!.newest! - 9, a!.newest!);
  const oldest = await store.samplesFrom('A', 0, 10);
  await store.close();
  const median = (waits: number[]) => waits.sort((x, y) => x - y)[waits.length >> 1]!;
  const [alone, pruning] = [median(before), median(during)];
  report({
    tried: `${Math.round(STREAM / MEBIBYTE)} MiB under a ceiling of ${CEILING / MEBIBYTE} MiB`,
    acknowledged: a!.samples + b!.samples,
    lost: 0,
    twice: 0,
    'largest MiB with the log': (largest / MEBIBYTE).toFixed(1),
    'ms to a commit before it': alone.toFixed(0),
    'under it': pruning.toFixed(0),
    longest: during.at(-1)!.toFixed(0),
    'MB/s': (sent / 1e3 / (performance.now() - began)).toFixed(1),
  });
  expect(largest).toBeLessThan(CEILING);
  expect(oldest.ordinal).toBeGreaterThan(0);
  expect(newest.values.length).toBeGreaterThan(8000);
  expect(a!.samples + b!.samples).toBe((sent / 8) | 0);
  // as long as without, but for what two kinds of work in one thread must cost
  expect(pruning).toBeLessThan(3 * alone + 100);
  expect(warned).toEqual([]);
}, 600_000);
