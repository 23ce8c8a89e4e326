import { expect, test } from 'vitest';
import { openStore } from '../../../server/store/openStore.ts';
import type { StoredDelivery } from '../../../server/store/store.ts';
import type { MeasuredDelay } from '../../../shared-types/delivery.ts';
import { temporaryFolder } from './temporaryFolder.ts';

const options = { commitEvery: 0.005 };
const waiting: StoredDelivery = {
  id: 0,
  receiver: 'bench lamp',
  kind: 'issued',
  event: 'loop/12.5/issued',
  watch: 'loop',
  warning: 3,
  madeAt: 100,
  state: 'pending',
  attempts: 0,
  settledAt: null,
  text: '',
  body: '{"a":1}',
  until: 120,
};
const settled: StoredDelivery = {
  ...waiting,
  id: 1,
  state: 'delivered',
  attempts: 2,
  settledAt: 101,
  text: '204',
};

test('a message waits until it is settled, over a restart too, and is then sent no more', async () => {
  const folder = temporaryFolder();
  let store = openStore(folder, options);
  expect(await store.saveDelivery(waiting)).toBe(1);
  await store.close();
  store = openStore(folder, options);
  expect(await store.pendingDeliveries()).toEqual([{ ...waiting, id: 1 }]);
  expect(await store.saveDelivery(settled)).toBe(1);
  expect(await store.pendingDeliveries()).toEqual([]);
  expect(await store.deliveries({})).toEqual([{ ...settled, body: '' }]);
  await store.close();
});

test('the same event for the same receiver is the same message: it is not taken twice, settled or not', async () => {
  const store = openStore(temporaryFolder(), options);
  expect(await store.saveDelivery(waiting)).toBe(1);
  expect(await store.saveDelivery({ ...waiting, body: 'again' })).toBeNull();
  await store.saveDelivery(settled);
  expect(await store.saveDelivery(waiting)).toBeNull();
  expect(await store.saveDelivery({ ...waiting, receiver: 'another' })).toBeGreaterThan(1);
  expect((await store.deliveries({ warning: 3 })).map(({ receiver, state }) => [receiver, state])).toEqual([
    ['bench lamp', 'delivered'],
    ['another', 'pending'],
  ]);
  await store.close();
});

test('deliveries are listed by warning and receiver, from an id on or the newest', async () => {
  const store = openStore(temporaryFolder(), options);
  for (let warning = 1; warning <= 4; warning++)
    for (const receiver of ['a', 'b'])
      await store.saveDelivery({ ...waiting, warning, receiver, event: `loop/${warning}/issued` });
  const listed = async (query: Parameters<typeof store.deliveries>[0]) =>
    (await store.deliveries(query)).map(({ warning, receiver }) => `${warning}${receiver}`);
  expect(await listed({ warning: 2 })).toEqual(['2a', '2b']);
  expect(await listed({ receiver: 'b', most: 2 })).toEqual(['1b', '2b']);
  expect(await listed({ receiver: 'b', most: 2, newest: true })).toEqual(['3b', '4b']);
  expect(await listed({ after: 6 })).toEqual(['4a', '4b']);
  await store.close();
});

test('of each watch the newest measured delay is kept', async () => {
  const folder = temporaryFolder();
  let store = openStore(folder, options);
  const delay = { watch: 'loop', trial: 't1', total: 0.4 } as MeasuredDelay;
  expect(await store.delay('loop')).toBeNull();
  await store.saveDelay(delay);
  await store.saveDelay({ ...delay, trial: 't2', total: 0.5 });
  await store.close();
  store = openStore(folder, options);
  expect(await store.delay('loop')).toEqual({ watch: 'loop', trial: 't2', total: 0.5 });
  expect(await store.delay('another')).toBeNull();
  await store.close();
});
