import { join } from 'node:path';
import Database from 'better-sqlite3';
import { expect, test } from 'vitest';
import { openStore } from '../../../server/store/openStore.ts';
import { createStoreThread } from '../../../server/store/storeThread.ts';
import { frame, temporaryFolder } from './temporaryFolder.ts';

const options = { commitEvery: 0.005 };

test('the store in a thread answers as the one in line, and leaves the caller its arrays', async () => {
  const folder = temporaryFolder();
  const store = await createStoreThread(folder, options);
  const big = Float64Array.from({ length: 3000 }, (_, i) => i);
  const timed = frame(1, 0, big.subarray(10, 13), {
    times: Float64Array.of(50, 51, 53),
    values: big.subarray(10, 13),
  });
  await store.appendFrames([frame(0, 0, big, { values: big }), timed]);
  expect([big.length, timed.times!.length]).toEqual([3000, 3]);
  expect((await store.samplesFrom('A', 2999, 9)).values).toEqual(Float64Array.of(2999, 10, 11, 12));
  expect((await store.run('A', 'run 1')).digests.get(1)).toBe(timed.digest);
  await store.saveWatch({ watch: 'w', settings: '{}', snapshot: null });
  const trace = { times: big.subarray(3, 6), values: big.subarray(3, 6) };
  await store.saveProgress([{ watch: 'w', snapshot: Buffer.from([1, 2]).subarray(0, 1), trace }]);
  expect((await store.watches())[0]!.snapshot).toEqual(Uint8Array.of(1));
  expect([...(await store.traceColumns('w', 0, 9, 50)).low]).toEqual([3, 4, 5]);
  expect(await store.log({ time: 0, kind: 'note', channel: null, watch: null, by: null, text: 'x' })).toBe(1);
  await store.close();
  await expect(store.channels()).rejects.toMatchObject({ code: 'CLOSED' });
  const inLine = openStore(folder, options);
  expect((await inLine.channels())[0]!.samples).toBe(3003);
  await inLine.close();
});

test('what keeps a store from opening comes with its code', async () => {
  const folder = temporaryFolder();
  const store = await createStoreThread(folder, options);
  await expect(createStoreThread(folder, options)).rejects.toMatchObject({ code: 'IN_USE' });
  await store.close();
});

test('on a full disk, frames sent before the caller could hear of it are refused too, so that no hole is left', async () => {
  const folder = temporaryFolder();
  const store = await createStoreThread(folder, { commitEvery: 0.005, largestBytes: 400_000 });
  await store.appendFrames([frame(0, 0, [1])]);
  const calls = [
    store.appendFrames([frame(1, 1, new Float64Array(60_000))]),
    ...[2, 3, 4].map((seq) => store.appendFrames([frame(seq, 700 + seq, [1])])),
    store.skipFrame('A', 'run 1', 5, 5),
  ];
  const outcomes = await Promise.allSettled(calls);
  expect(outcomes.map((outcome) => outcome.status === 'rejected' && outcome.reason.code)).toEqual(
    Array(5).fill('FULL'),
  );
  expect((await store.run('A', 'run 1')).next).toBe(1);
  await store.appendFrames([frame(1, 1, [2])]);
  expect([...(await store.samplesFrom('A', 0, 9)).values]).toEqual([1, 2]);
  await store.close();
});

test('a fault of the database reaches the caller as a sentence, and the thread goes on', async () => {
  const folder = temporaryFolder();
  const store = await createStoreThread(folder, options);
  const other = new Database(join(folder, 'foreshift.db'));
  other.exec('DROP TABLE log');
  other.close();
  const entry = { time: 0, kind: 'note', channel: null, watch: null, by: null, text: 'x' } as const;
  await expect(store.log(entry)).rejects.toMatchObject({
    code: 'FAILED',
    message: expect.stringContaining('log'),
  });
  await store.appendFrames([frame(0, 0, [1])]);
  expect((await store.channels())[0]!.samples).toBe(1);
  await store.close();
});
