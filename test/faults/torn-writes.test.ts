/**
 * A power cut tears what had not reached the disk: bytes of the write-ahead log behind the newest commit. A failing disk
 * may spoil any byte. The first costs nothing that was acknowledged; the second may, but never a start.
 */
import { copyFileSync, readdirSync, readFileSync, statSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { expect, it } from 'vitest';
import { openStore } from '../../server/store/openStore.ts';
import { StoreError } from '../../server/store/storeError.ts';
import { frame, temporaryFolder } from '../server/store/temporaryFolder.ts';
import { chance, report, WHOLE } from './report.ts';

const ROUNDS = WHOLE ? 400 : 30;
const SAMPLES = 300;
const options = { commitEvery: 0.001 };
const DATABASE = 'foreshift.db';
const LOG = 'foreshift.db-wal';

const values = (seq: number) => Float64Array.from({ length: SAMPLES }, (_, i) => seq * SAMPLES + i);

/** A folder as a power cut leaves it: `durable` frames were acknowledged when the log had `logBytes`, more came after. */
async function cutOff() {
  const folder = temporaryFolder();
  const store = openStore(folder, options);
  let seq = 0;
  const send = () => store.appendFrames([frame(seq, seq * 3, values(seq++))]);
  for (let i = 0; i < 25; i++) await send();
  const logBytes = statSync(join(folder, LOG)).size;
  const durable = seq;
  for (let i = 0; i < 15; i++) await send();
  const copy = temporaryFolder();
  for (const name of [DATABASE, LOG]) copyFileSync(join(folder, name), join(copy, name));
  await store.close();
  return { copy, durable, logBytes };
}

/** Frames that are there after a start; throws unless they are the first so many, whole and in order. */
async function framesThere(folder: string): Promise<{ frames: number; notices: readonly string[] }> {
  const store = openStore(folder, options);
  try {
    const found = (await store.samplesFrom('A', 0, 1e6)).values;
    expect(found).toEqual(Float64Array.from({ length: found.length }, (_, i) => i));
    const { next } = await store.run('A', 'run 1');
    expect(found.length).toBe(next * SAMPLES);
    await store.appendFrames([frame(next, 1e6, [1])]);
    expect((await store.samplesFrom('A', 0, 1e6)).values.length).toBe(found.length + 1);
    return { frames: next, notices: store.notices };
  } finally {
    await store.close();
  }
}

it('a log torn behind the last acknowledged commit costs nothing that was acknowledged', async () => {
  const { copy, durable, logBytes } = await cutOff();
  const [database, log] = [DATABASE, LOG].map((name) => readFileSync(join(copy, name))) as [Buffer, Buffer];
  const random = chance(7);
  let [lost, least, most] = [0, Number.POSITIVE_INFINITY, 0];
  for (let round = 0; round < ROUNDS; round++) {
    const folder = temporaryFolder();
    const at = logBytes + Math.floor(random() * (log.length - logBytes));
    let torn = Buffer.from(log);
    if (round % 3 === 0) torn = torn.subarray(0, at);
    else if (round % 3 === 1) torn.fill(0, at);
    else for (let i = at; i < torn.length; i++) torn[i] = Math.floor(random() * 256);
    writeFileSync(join(folder, DATABASE), database);
    writeFileSync(join(folder, LOG), torn);
    const { frames, notices } = await framesThere(folder);
    expect(notices).toEqual([]);
    lost += Math.max(0, durable - frames);
    least = Math.min(least, frames);
    most = Math.max(most, frames);
  }
  report({
    tried: `torn log, ${ROUNDS} ways`,
    acknowledged: ROUNDS * durable,
    lost,
    twice: 0,
    'frames found': `${least} to ${most}`,
  });
  expect(lost).toBe(0);
});

/** A folder of a server that was stopped: all of it in the database. */
async function stopped() {
  const folder = temporaryFolder();
  const store = openStore(folder, options);
  for (let seq = 0; seq < 40; seq++) await store.appendFrames([frame(seq, seq * 3, values(seq))]);
  await store.close();
  return folder;
}

/** How a start met spoilt bytes: it begins anew beside what was damaged, goes on, or says in words what it cannot do. */
async function startedAs(folder: string): Promise<'set aside' | 'went on' | 'said so'> {
  const store = openStore(folder, options);
  const aside = readdirSync(folder).filter((name) => /^foreshift\.damaged-.*\.db$/.test(name));
  expect(aside).toHaveLength(store.notices.length);
  for (const notice of store.notices)
    expect(notice).toMatch(/^the database .* was damaged .* kept as .* new one begun[^\n]*$/);
  try {
    const { next } = await store.run('A', 'run 1');
    await store.samplesFrom('A', 0, 1e6);
    await store.signalColumns('A', 0, 120, 50);
    await store.appendFrames([frame(next, 1e6, [1])]);
    return store.notices.length > 0 ? 'set aside' : 'went on';
  } catch (fault) {
    expect(fault).toBeInstanceOf(StoreError);
    return 'said so';
  } finally {
    await store.close();
  }
}

it.each([
  ['the log of a server that was cut off', LOG, async () => (await cutOff()).copy],
  ['the database of a server that was stopped', DATABASE, stopped],
] as const)('bytes spoilt anywhere in %s are met with a start', async (_, spoilt, make) => {
  const from = await make();
  const random = chance(11);
  const met = { 'went on': 0, 'set aside': 0, 'said so': 0 };
  for (let round = 0; round < ROUNDS; round++) {
    const folder = temporaryFolder();
    for (const name of readdirSync(from).filter((each) => each === DATABASE || each === LOG))
      copyFileSync(join(from, name), join(folder, name));
    const bytes = readFileSync(join(folder, spoilt));
    const at = Math.floor(random() ** 2 * bytes.length);
    const end = Math.min(bytes.length, at + 1 + Math.floor(random() * 6000));
    for (let i = at; i < end; i++) bytes[i] = Math.floor(random() * 256);
    writeFileSync(join(folder, spoilt), bytes);
    met[await startedAs(folder)]++;
  }
  report({ tried: `spoilt bytes in ${spoilt}, ${ROUNDS} ways`, acknowledged: 0, lost: 0, twice: 0, ...met });
  if (spoilt === DATABASE) expect(met['set aside']).toBeGreaterThan(0);
});
