import { existsSync, readdirSync, readFileSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { gunzipSync } from 'node:zlib';
import Database from 'better-sqlite3';
import { expect, test } from 'vitest';
import { openStore, openStoreReader } from '../../../server/store/openStore.ts';
import { frame, temporaryFolder } from './temporaryFolder.ts';

const options = { commitEvery: 0.005 };

test('a missing folder is made, and what was stored is there when it is opened again', async () => {
  const folder = join(temporaryFolder(), 'a', 'b');
  const store = openStore(folder, options);
  expect(store.notices).toEqual([]);
  await store.saveChannel({ channel: 'A', unit: 'K', label: 'left', interval: 0.01, low: null, high: 9 });
  await store.appendFrames([frame(0, 5, [1, Number.NaN, 3]), frame(1, 5.03, [4])]);
  await store.countFault('A', 'gap', 2);
  await store.close();
  const again = openStore(folder, options);
  expect(await again.channels()).toEqual([
    {
      channel: 'A',
      unit: 'K',
      label: 'left',
      interval: 0.01,
      low: null,
      high: 9,
      samples: 4,
      holes: 0,
      gaps: 2,
      first: 5,
      newest: 5.03,
      value: 4,
    },
  ]);
  const block = await again.samplesFrom('A', 0, 100);
  expect(block.ordinal).toBe(0);
  expect([...block.values]).toEqual([1, Number.NaN, 3, 4]);
  expect([...block.times]).toEqual([5, 5 + 0.01, 5 + 2 * 0.01, 5.03]);
  await again.close();
});

test('a read sees what was queued before it, though nothing is committed yet', async () => {
  const store = openStore(temporaryFolder(), { commitEvery: 5 });
  const written = store.appendFrames([frame(0, 0, [1, 2])]);
  let durable = false;
  written.then(() => {
    durable = true;
  });
  expect([...(await store.samplesFrom('A', 0, 9)).values]).toEqual([1, 2]);
  expect(durable).toBe(false);
  await store.close();
  await written;
});

test('a run knows its next frame and the digests of its frames; a frame sent again changes nothing', async () => {
  const folder = temporaryFolder();
  const store = openStore(folder, options);
  await store.appendFrames([frame(0, 0, [1]), frame(1, 0.01, [2])]);
  await store.skipFrame('A', 'run 1', 2, 77);
  await store.appendFrames([frame(1, 0.01, [2]), frame(3, 0.03, [4])]);
  const expected = new Map([
    [0, frame(0, 0, []).digest],
    [1, frame(1, 0, []).digest],
    [2, 77],
    [3, frame(3, 0, []).digest],
  ]);
  expect(await store.run('A', 'run 1')).toEqual({ next: 4, digests: expected });
  expect(await store.run('A', 'another')).toEqual({ next: 0, digests: new Map() });
  await store.close();
  const again = openStore(folder, options);
  expect(await again.run('A', 'run 1')).toEqual({ next: 4, digests: expected });
  expect([...(await again.samplesFrom('A', 0, 9)).values]).toEqual([1, 2, 4]);
  await again.close();
});

test('the digests of the newest 4096 frames are kept, older ones go', async () => {
  const store = openStore(temporaryFolder(), options);
  await store.appendFrames(Array.from({ length: 20_000 }, (_, seq) => frame(seq, seq, [seq])));
  const { next, digests } = await store.run('A', 'run 1');
  expect(next).toBe(20_000);
  expect(digests.size).toBeLessThan(10_000);
  for (let seq = 20_000 - 4096; seq < 20_000; seq++) expect(digests.get(seq)).toBe(frame(seq, 0, []).digest);
  await store.close();
});

test('frames without a run are stored but not numbered', async () => {
  const store = openStore(temporaryFolder(), options);
  await store.appendFrames([frame(-1, 0, [1], { run: '' }), frame(-1, 1, [2], { run: '' })]);
  expect((await store.samplesFrom('A', 0, 9)).values.length).toBe(2);
  expect((await store.run('A', '')).next).toBe(0);
  await store.close();
});

test('a frame whose times do not ascend is refused alone, and nothing of its call is stored', async () => {
  const store = openStore(temporaryFolder(), options);
  const good = store.appendFrames([frame(0, 0, [1])]);
  const bad = store.appendFrames([frame(1, 1, [2]), frame(2, 2, [3, 4], { times: Float64Array.of(3, 3) })]);
  await expect(bad).rejects.toMatchObject({ code: 'FAILED' });
  await good;
  expect((await store.run('A', 'run 1')).next).toBe(1);
  expect([...(await store.samplesFrom('A', 0, 9)).values]).toEqual([1]);
  await store.close();
});

test('a second server on the same folder is refused by name of the folder; a reader is not', async () => {
  const folder = temporaryFolder();
  const store = openStore(folder, options);
  await store.appendFrames([frame(0, 0, [1, 2])]);
  expect(() => openStore(folder, options)).toThrow(
    expect.objectContaining({ code: 'IN_USE', message: expect.stringContaining(folder) }),
  );
  const reader = openStoreReader(folder);
  expect([...(await reader.samplesBetween('A', 0, 1)).values]).toEqual([1, 2]);
  await store.appendFrames([frame(1, 0.02, [3])]);
  expect([...(await reader.samplesBetween('A', 0, 1)).values]).toEqual([1, 2, 3]);
  await reader.close();
  await store.close();
  await openStore(folder, options).close();
});

test('a reader of a folder without a store says so', () => {
  expect(() => openStoreReader(temporaryFolder())).toThrow(expect.objectContaining({ code: 'NO_STORE' }));
});

test('a closed store refuses everything, and closing twice harms nothing', async () => {
  const store = openStore(temporaryFolder(), options);
  await store.close();
  await store.close();
  await expect(store.appendFrames([frame(0, 0, [1])])).rejects.toMatchObject({ code: 'CLOSED' });
  await expect(store.channels()).rejects.toMatchObject({ code: 'CLOSED' });
});

test('a database of a newer version is refused and left as it is', async () => {
  const folder = temporaryFolder();
  await openStore(folder, options).close();
  const database = new Database(join(folder, 'foreshift.db'));
  database.pragma('user_version = 99');
  database.close();
  expect(() => openStore(folder, options)).toThrow(
    expect.objectContaining({ code: 'NEWER', message: expect.stringContaining('99') }),
  );
  expect(() => openStoreReader(folder)).toThrow(expect.objectContaining({ code: 'NEWER' }));
  expect(readdirSync(folder).filter((name) => name.includes('damaged'))).toEqual([]);
});

test.each([
  ['from its first byte', 0],
  ['in its middle', 20_000],
])('a database damaged %s is kept aside with a notice, and a fresh one works', async (_, at) => {
  const folder = temporaryFolder();
  const store = openStore(folder, options);
  await store.appendFrames([frame(0, 0, new Float64Array(5000))]);
  await store.close();
  const file = join(folder, 'foreshift.db');
  const bytes = readFileSync(file);
  bytes.fill(0xa5, at, at + 30_000);
  writeFileSync(file, bytes);
  const fresh = openStore(folder, options);
  expect(fresh.notices).toHaveLength(1);
  const aside = readdirSync(folder).filter((name) => /^foreshift\.damaged-.*\.db$/.test(name));
  expect(aside).toHaveLength(1);
  expect(fresh.notices[0]).toContain(aside[0]);
  expect(readFileSync(join(folder, aside[0]!)).equals(bytes)).toBe(true);
  await fresh.appendFrames([frame(0, 0, [1])]);
  expect((await fresh.channels())[0]!.samples).toBe(1);
  await fresh.close();
});

test('damage in a database too large to be read through is noted when it is met; the next start sets it aside', async () => {
  const folder = temporaryFolder();
  const store = openStore(folder, options);
  for (let seq = 0; seq < 45; seq++)
    await store.appendFrames([frame(seq, seq * 1000, new Float64Array(100_000))]);
  await store.close();
  const file = join(folder, 'foreshift.db');
  const bytes = readFileSync(file);
  expect(bytes.length).toBeGreaterThan(33e6);
  writeFileSync(file, bytes.fill(0xa5, 20e6, 21e6));
  const again = openStore(folder, options);
  expect(again.notices).toEqual([]);
  await expect(again.samplesBetween('A', 0, 1e9)).rejects.toMatchObject({ code: 'DAMAGED' });
  await again.close();
  const fresh = openStore(folder, options);
  expect(fresh.notices).toHaveLength(1);
  expect(await fresh.channels()).toEqual([]);
  await fresh.close();
  const third = openStore(folder, options);
  expect(third.notices).toEqual([]);
  await third.close();
});

test('a full disk rejects with FULL, leaves nothing half-written, and a later append succeeds once there is room', async () => {
  const folder = temporaryFolder();
  const ballast = new Database(join(folder, 'foreshift.db'));
  ballast.exec('CREATE TABLE ballast (bytes BLOB); INSERT INTO ballast VALUES (zeroblob(400000))');
  const store = openStore(folder, { commitEvery: 0.005, largestBytes: 700_000 });
  const kept = Float64Array.from({ length: 1500 }, (_, i) => i);
  await store.appendFrames([frame(0, 0, kept)]);
  const tooMuch = new Float64Array(60_000).fill(7);
  const over = store.appendFrames([frame(1, 15, tooMuch)]);
  const behind = store.appendFrames([frame(2, 615, [8])]);
  await expect(over).rejects.toMatchObject({ code: 'FULL' });
  await expect(behind).rejects.toMatchObject({ code: 'FULL' });
  expect((await store.run('A', 'run 1')).next).toBe(1);
  expect((await store.samplesFrom('A', 0, 1e6)).values).toEqual(kept);
  ballast.exec('DROP TABLE ballast');
  ballast.close();
  await store.appendFrames([frame(1, 15, tooMuch.subarray(0, 30_000))]);
  expect((await store.samplesFrom('A', 0, 1e6)).values).toEqual(
    Float64Array.from([...kept, ...tooMuch.subarray(0, 30_000)]),
  );
  const columns = await store.signalColumns('A', 0, 400, 10);
  expect(Math.max(...columns.high)).toBe(1499);
  await store.close();
});

test('models, watches with their snapshots, and the log come back as they were', async () => {
  const store = openStore(temporaryFolder(), options);
  await store.saveModel('m', '{"a":1}');
  await store.saveModel('m', '{"a":2}');
  expect(await store.model('m')).toBe('{"a":2}');
  expect(await store.model('other')).toBeNull();
  expect(await store.models()).toEqual([{ name: 'm', json: '{"a":2}' }]);
  await store.saveWatch({ watch: 'w', settings: '{}', snapshot: null });
  const trace = { times: Float64Array.of(1, 2, 3), values: Float64Array.of(5, Number.NaN, 7) };
  await store.saveProgress([{ watch: 'w', snapshot: Uint8Array.of(1, 2, 3), trace }]);
  expect(await store.watches()).toEqual([{ watch: 'w', settings: '{}', snapshot: Uint8Array.of(1, 2, 3) }]);
  // settings that change before a watch has made a snapshot of its own must not cost it the stored one
  await store.saveWatch({ watch: 'w', settings: '{"a":1}', snapshot: null });
  expect(await store.watches()).toEqual([
    { watch: 'w', settings: '{"a":1}', snapshot: Uint8Array.of(1, 2, 3) },
  ]);
  const drawn = await store.traceColumns('w', 0, 4, 100);
  expect([...drawn.high]).toEqual([5, Number.NaN, 7]);
  await expect(
    store.saveProgress([{ watch: 'x', snapshot: Uint8Array.of(1), trace: null }]),
  ).rejects.toMatchObject({ code: 'FAILED' });
  const entry = { time: 1, kind: 'note', channel: null, watch: 'w', by: null, text: 'I touched it' } as const;
  expect([await store.log(entry), await store.log({ ...entry, text: 'again' })]).toEqual([1, 2]);
  expect((await store.logEntries({ newest: true, most: 1 })).map((line) => line.text)).toEqual(['again']);
  expect(await store.logEntries({ after: 0, most: 1 })).toEqual([{ ...entry, id: 1 }]);
  await store.close();
});

/** An open store over a copy of the fixture of a schema version. */
function fixture(version: number) {
  const folder = temporaryFolder();
  writeFileSync(
    join(folder, 'foreshift.db'),
    gunzipSync(readFileSync(new URL(`../../data/store-version-${version}.db.gz`, import.meta.url))),
  );
  return { folder, open: () => openStore(folder, options) };
}

test.each([1, 2, 3])(
  'a database of version %i opens, and its samples are what they were',
  async (version) => {
    const { folder, open } = fixture(version);
    const store = open();
    expect(store.notices).toEqual([]);
    const block = await store.samplesFrom('A', 0, 1e5);
    expect(block.values).toEqual(
      Float64Array.from({ length: 2500 }, (_, i) => (i === 1300 ? Number.NaN : (i % 97) / 8)),
    );
    expect(block.times).toEqual(Float64Array.from({ length: 2500 }, (_, i) => 1e9 + i * 0.5));
    expect(await store.run('A', 'run 1')).toEqual({
      next: 25,
      digests: new Map(Array.from({ length: 25 }, (_, seq) => [seq, seq * 3])),
    });
    expect((await store.watches()).map((watch) => watch.watch)).toEqual(['w']);
    expect((await store.warnings({})).map((warning) => warning.at)).toEqual([1e9 + 0.1]);
    expect(existsSync(join(folder, 'foreshift.db'))).toBe(true);
    await store.close();
  },
);

test.each([2, 3])('a database of version %i keeps what is left out and its rehearsals', async (version) => {
  const store = fixture(version).open();
  expect(await store.marks()).toEqual([
    { id: 1, channel: 'A', from: 1e9 + 5, to: null, why: 'calibration', text: 'new zero', by: 'me' },
  ]);
  expect(await store.conditions()).toEqual([{ id: 1, channel: 'A', when: 'B', side: 'above', level: 2.5 }]);
  expect(await store.rehearsals()).toEqual([{ id: '1', state: '{"state":"done"}' }]);
  expect(await store.rehearsalResult('1')).toEqual(Uint8Array.of(4, 5, 6));
  await store.close();
});

test('a database of version 2 comes to have an outbox, and one of version 3 keeps what waits in its', async () => {
  const older = fixture(2).open();
  expect(await older.pendingDeliveries()).toEqual([]);
  const newer = fixture(3).open();
  const [waiting] = await newer.pendingDeliveries();
  expect(waiting).toMatchObject({ receiver: 'lamp', event: 'w/1000000000.1/issued', until: 1e9 + 20 });
  expect(await older.saveDelivery({ ...waiting!, id: 0 })).toBe(1);
  await Promise.all([older.close(), newer.close()]);
});

test('a database of version 1 can be read before a server has brought it forward, with nothing left out', async () => {
  const { folder } = fixture(1);
  const reader = openStoreReader(folder);
  expect([await reader.marks(), await reader.conditions()]).toEqual([[], []]);
  expect((await reader.channels()).map(({ channel }) => channel)).toEqual(['A']);
  await reader.close();
});
