import { existsSync, readdirSync, readFileSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import Database from 'better-sqlite3';
import { expect, test } from 'vitest';
import { isInUse, readBackup, writeBackup } from '../../../server/store/backup.ts';
import { openStore } from '../../../server/store/openStore.ts';
import { createStoreThread } from '../../../server/store/storeThread.ts';
import { frame, temporaryFolder } from './temporaryFolder.ts';

const options = { commitEvery: 0.005 };
const label = { madeAt: 1e9, program: 'foreshift test', settings: '{"recordingGap": 30}' };
const ramp = (from: number, count: number) => Float64Array.from({ length: count }, (_, i) => from + i);

/** A backup of a folder with 5000 samples, and where it is. */
async function backedUp() {
  const folder = temporaryFolder();
  const store = openStore(folder, options);
  await store.appendFrames([frame(0, 0, ramp(0, 5000))]);
  await store.saveModel('m', '{"a":1}');
  await store.close();
  const file = join(temporaryFolder(), 'copy.db');
  return { folder, file, facts: writeBackup(folder, file, label) };
}

test('a backup put into an empty folder is the same store, with its settings', async () => {
  const { file, facts } = await backedUp();
  expect(facts).toMatchObject({ file, channels: 1, samples: 5000, warnings: 0, program: 'foreshift test' });
  const folder = temporaryFolder();
  const read = readBackup(file, folder);
  expect(read).toEqual({ facts, settings: label.settings });
  const store = openStore(folder, options);
  expect(store.notices).toEqual([]);
  expect((await store.samplesFrom('A', 0, 1e6)).values).toEqual(ramp(0, 5000));
  expect(await store.model('m')).toBe('{"a":1}');
  expect((await store.run('A', 'run 1')).next).toBe(1);
  await store.appendFrames([frame(1, 50, ramp(5000, 10))]);
  expect((await store.samplesFrom('A', 0, 1e6)).values).toEqual(ramp(0, 5010));
  await store.close();
  expect(readdirSync(folder).filter((name) => name.includes('partial'))).toEqual([]);
});

test('while a server writes, a backup holds everything that was durable when it began, and is of one moment', async () => {
  const folder = temporaryFolder();
  const store = await createStoreThread(folder, options);
  let seq = 0;
  let durable = 0;
  let stopped = false;
  const writing = (async () => {
    while (!stopped) {
      await store.appendFrames([frame(seq, seq, ramp(100 * seq, 100), { dt: 0.01 })]);
      durable = ++seq;
    }
  })();
  for (let round = 0; round < 5; round++) {
    await new Promise((resolve) => setTimeout(resolve, 60));
    const before = durable;
    const file = join(temporaryFolder(), 'copy.db');
    const facts = writeBackup(folder, file, label);
    expect(facts.samples).toBeGreaterThanOrEqual(100 * before);
    const restored = temporaryFolder();
    readBackup(file, restored);
    const copy = openStore(restored, options);
    const { next } = await copy.run('A', 'run 1');
    expect((await copy.samplesFrom('A', 0, 1e7)).values).toEqual(ramp(0, 100 * next));
    await copy.close();
  }
  stopped = true;
  await writing;
  await store.close();
  expect(durable).toBeGreaterThan(10);
});

test('a backup of a newer version, a damaged one, and what is none are refused by name; the folder stays empty', async () => {
  const { file } = await backedUp();
  const whole = readFileSync(file);
  const [newer, damaged, cut, other, text] = ['n', 'd', 'c', 'o', 't'].map((name) =>
    join(temporaryFolder(), name),
  ) as [string, string, string, string, string];
  writeFileSync(newer, whole);
  const database = new Database(newer);
  database.pragma('user_version = 99');
  database.close();
  writeFileSync(damaged, Buffer.from(whole).fill(0xa5, 12_000, 40_000));
  writeFileSync(cut, whole.subarray(0, whole.length - 8192));
  new Database(other).exec('CREATE TABLE t (a)').close();
  writeFileSync(text, 'time,A\n0,1\n');
  for (const [bad, code] of [
    [newer, 'NEWER'],
    [damaged, 'DAMAGED'],
    [cut, 'DAMAGED'],
    [other, 'NOT_A_BACKUP'],
    [text, 'NOT_A_BACKUP'],
  ] as const) {
    const folder = temporaryFolder();
    expect(() => readBackup(bad, folder), code).toThrow(
      expect.objectContaining({ code, message: expect.stringContaining(bad) }),
    );
    expect(readdirSync(folder)).toEqual([]);
  }
});

test('a target that cannot be written leaves nothing half made', async () => {
  const { folder } = await backedUp();
  const file = join(temporaryFolder(), 'no such folder', 'copy.db');
  expect(() => writeBackup(folder, file, label)).toThrow();
  expect(existsSync(file) || existsSync(`${file}.partial`)).toBe(false);
});

test('a folder is in use while a store is open on it', async () => {
  const folder = temporaryFolder();
  expect(isInUse(folder)).toBe(false);
  const store = openStore(folder, options);
  expect(isInUse(folder)).toBe(true);
  await store.close();
  expect(isInUse(folder)).toBe(false);
});
