import { expect, test } from 'vitest';
import { openStore, openStoreReader } from '../../../server/store/openStore.ts';
import type { Mark, StoredCondition } from '../../../shared-types/rehearsal.ts';
import { temporaryFolder } from './temporaryFolder.ts';

const options = { commitEvery: 0.005 };
const mark: Mark = { id: 0, channel: 'A', from: 5, to: null, why: 'touched', text: '', by: 'me' };
const condition: StoredCondition = { id: 0, channel: 'A', when: 'B', side: 'below', level: -1 };

test('marks get an id, are changed under it and are gone once removed, for a reader beside the server too', async () => {
  const folder = temporaryFolder();
  const store = openStore(folder, options);
  expect([await store.saveMark(mark), await store.saveMark({ ...mark, channel: 'C' })]).toEqual([1, 2]);
  await store.saveMark({ ...mark, id: 1, to: 9 });
  const reader = openStoreReader(folder);
  expect(await reader.marks()).toEqual([
    { ...mark, id: 1, to: 9 },
    { ...mark, id: 2, channel: 'C' },
  ]);
  await store.removeMark(1);
  await store.removeMark(77);
  expect((await reader.marks()).map(({ id }) => id)).toEqual([2]);
  expect(await store.saveMark(mark)).toBe(3);
  await Promise.all([reader.close(), store.close()]);
});

test('conditions are kept over a restart', async () => {
  const folder = temporaryFolder();
  const store = openStore(folder, options);
  expect(await store.saveCondition(condition)).toBe(1);
  await store.saveCondition({ ...condition, when: 'D' });
  await store.removeCondition(1);
  await store.close();
  const again = openStore(folder, options);
  expect(await again.conditions()).toEqual([{ ...condition, id: 2, when: 'D' }]);
  await again.close();
});

test('a rehearsal is stored with its result and can be removed', async () => {
  const store = openStore(temporaryFolder(), options);
  await store.saveRehearsal({ id: 'b', state: '{}', result: Uint8Array.of(1) });
  await store.saveRehearsal({ id: 'a', state: '{}', result: Uint8Array.of(2) });
  expect((await store.rehearsals()).map(({ id }) => id)).toEqual(['b', 'a']);
  await store.removeRehearsal('b');
  expect([await store.rehearsalResult('b'), await store.rehearsalResult('a')]).toEqual([
    null,
    Uint8Array.of(2),
  ]);
  await store.close();
});
