import { Encoder } from 'cbor-x';
import { expect, it } from 'vitest';
import { NO_ALARM } from '../../../../server/gateway/watches/alarmState.ts';
import { createKeeping, type KeepingNeeds } from '../../../../server/gateway/watches/keeping.ts';
import { openStore } from '../../../../server/store/openStore.ts';
import { Settings } from '../../../../shared-types/settings.ts';
import type { SwitchEvent } from '../../../../shared-types/warning.ts';
import { frame, temporaryFolder } from '../../store/temporaryFolder.ts';
import { swingModel } from '../harness.ts';

const encoder = new Encoder({ useRecords: false });
const BLOCK = 1024;
const BLOCKS = 40;
/** in reach of a step, out of reach of what is left: the newest block and what is pinned */
const TINY = 1;

/** 40 blocks of channel A at 100 Hz, a watch on it with one switch in block 20 and a snapshot up to block 38. */
async function kept(settings: Partial<KeepingNeeds['settings']>, model = swingModel()) {
  const store = openStore(temporaryFolder(), { commitEvery: 0.001 });
  await store.appendFrames([frame(0, 0, new Float64Array(BLOCKS * BLOCK))]);
  const memo = {
    ...{ watch: 'w', name: 'w', model: model.name, channels: ['A'], reaction: 30 },
    ...{ use: 'in use', alarm: NO_ALARM, gradeSince: null },
  };
  const checkpoint = { snapshot: { version: 1 }, ordinals: { A: 38 * BLOCK }, offsets: {} };
  await store.saveWatch({
    watch: 'w',
    settings: JSON.stringify(memo),
    snapshot: encoder.encode(checkpoint),
  });
  const at = 20.5 * BLOCK * 0.01;
  await store.saveSwitch({ id: 0, watch: 'w', channel: 'A', at, outcome: 'pending' } as SwitchEvent);
  const log: string[] = [];
  const said: string[] = [];
  let time = 1e9;
  const keeping = createKeeping({
    store,
    settings: { keepFor: null, largestStore: null, recordingGap: 60, ...settings },
    watches: { model: () => model },
    journal: { log: ({ text }) => void log.push(text) },
    serverTime: () => time,
    warn: (text) => void said.push(text),
  });
  for (let i = 0; i < 5; i++) {
    time += 3;
    keeping.tick();
    await new Promise((resolve) => setTimeout(resolve, 40));
  }
  await keeping.close();
  const { times, values } = await store.samplesBetween('A', -1, 1e9);
  await store.close();
  return { times, values, at, log, said };
}

it('leaves everything as it is while the settings ask for nothing', async () => {
  const { values, log } = await kept({});
  expect([values.length, log]).toEqual([BLOCKS * BLOCK, []]);
});

it('keeps three horizons before a switch, one after it and what the snapshot needs, and says what was given up', async () => {
  const { horizon } = swingModel().rule!;
  const { times, at, log, said } = await kept({ largestStore: TINY });
  const left = [...times];
  expect(left.filter((time) => time >= at - 3 * horizon && time <= at + horizon).length).toBeGreaterThan(
    (4 * horizon) / 0.01 - 2,
  );
  expect(left.filter((time) => time >= 38 * BLOCK * 0.01)).toHaveLength(2 * BLOCK);
  expect(left.length).toBeLessThan(6 * BLOCK);
  expect(log.some((text) => /^the oldest \d+ samples of A were given up/.test(text))).toBe(true);
  // what is left is more than the ceiling: said once, here and in the log
  expect(said).toHaveLength(1);
  expect(said[0]).toContain('largestStore');
  expect(log.filter((text) => text === said[0])).toHaveLength(1);
});

it('keeps what a model in use was fitted on', async () => {
  const model = swingModel();
  const [from, to] = [3 * BLOCK * 0.01, 10 * BLOCK * 0.01];
  model.provenance.recordings = [{ name: 'stored:A/1', sha256: '', from, to, samples: 7 * BLOCK }];
  const { times } = await kept({ largestStore: TINY }, model);
  expect(times.filter((time) => time >= from && time <= to).length).toBeGreaterThanOrEqual(7 * BLOCK);
});

it('refuses settings under which nothing could be kept, and keys that are none', () => {
  expect(Settings.safeParse({ keepFor: 60 }).success).toBe(false);
  expect(Settings.safeParse({ largestStore: 1000 }).success).toBe(false);
  expect(Settings.safeParse({ keepfor: 86_400 }).success).toBe(false);
  expect(Settings.parse({ keepFor: 86_400, largestStore: null })).toMatchObject({ keepFor: 86_400 });
});
