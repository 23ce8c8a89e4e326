import { expect, test } from 'vitest';
import { openStore } from '../../../server/store/openStore.ts';
import type { SwitchEvent, Warning } from '../../../shared-types/warning.ts';
import { temporaryFolder } from './temporaryFolder.ts';

const warning = (at: number, rest: Partial<Warning> = {}): Warning => ({
  id: 0,
  watch: 'w',
  model: 'm',
  channels: ['A', 'B'],
  at,
  from: at + 10,
  to: at + 20,
  madeAt: 5,
  deliveredAt: null,
  variable: 'forcing',
  value: 2.5,
  threshold: 2,
  outcome: 'open',
  switchAt: null,
  lead: null,
  acknowledgedAt: null,
  acknowledgedBy: null,
  quiet: false,
  ...rest,
});

const switchEvent = (at: number, rest: Partial<SwitchEvent> = {}): SwitchEvent => ({
  id: 0,
  watch: 'w',
  channel: 'A',
  at,
  confirmedAt: at + 1,
  from: 0,
  to: 1,
  outcome: 'pending',
  warning: null,
  lead: null,
  ...rest,
});

test('a warning of the same watch at the same time, to the last bit, is the same warning', async () => {
  const store = openStore(temporaryFolder(), { commitEvery: 0.005 });
  const at = 0.1 + 0.2;
  const id = await store.saveWarning(warning(at));
  expect(await store.saveWarning(warning(at))).toBe(id);
  expect(await store.saveWarning(warning(0.3))).not.toBe(id);
  expect(await store.saveWarning(warning(at, { watch: 'other' }))).not.toBe(id);
  await store.close();
});

test('a warning said again after a crash keeps what was done to it meanwhile', async () => {
  const store = openStore(temporaryFolder(), { commitEvery: 0.005 });
  const id = await store.saveWarning(warning(7));
  const settled = warning(7, {
    id,
    deliveredAt: 8,
    acknowledgedAt: 9,
    acknowledgedBy: 'me',
    outcome: 'true',
    switchAt: 20,
    lead: 13,
  });
  expect(await store.saveWarning(settled)).toBe(id);
  expect(await store.saveWarning(warning(7, { madeAt: 99 }))).toBe(id);
  expect(await store.warnings({})).toEqual([settled]);
  await store.close();
});

test('warnings are found by channel, watch, time and id, oldest first', async () => {
  const store = openStore(temporaryFolder(), { commitEvery: 0.005 });
  for (const at of [1, 2, 3, 4])
    await store.saveWarning(warning(at, at === 2 ? { channels: ['C'], watch: 'v' } : {}));
  const times = async (query: Parameters<typeof store.warnings>[0]) =>
    (await store.warnings(query)).map(({ at }) => at);
  expect(await times({})).toEqual([1, 2, 3, 4]);
  expect(await times({ channel: 'B' })).toEqual([1, 3, 4]);
  expect(await times({ watch: 'v' })).toEqual([2]);
  expect(await times({ after: 2 })).toEqual([3, 4]);
  expect(await times({ since: 3 })).toEqual([3, 4]);
  expect(await times({ most: 2 })).toEqual([1, 2]);
  expect(await times({ most: 2, newest: true })).toEqual([3, 4]);
  await store.close();
});

test('switches are kept like warnings', async () => {
  const store = openStore(temporaryFolder(), { commitEvery: 0.005 });
  const id = await store.saveSwitch(switchEvent(5));
  expect(await store.saveSwitch(switchEvent(5, { id, outcome: 'warned', warning: 3, lead: 2 }))).toBe(id);
  expect(await store.saveSwitch(switchEvent(5))).toBe(id);
  await store.saveSwitch(switchEvent(6, { channel: 'B' }));
  expect(await store.switches({ channel: 'A' })).toEqual([
    switchEvent(5, { id, outcome: 'warned', warning: 3, lead: 2 }),
  ]);
  expect((await store.switches({ since: 6 })).map(({ at }) => at)).toEqual([6]);
  await expect(store.saveSwitch(switchEvent(Number.NaN))).rejects.toMatchObject({ code: 'FAILED' });
  await store.close();
});
