import { expect, it } from 'vitest';
import { createJournal } from '../../../server/gateway/journal.ts';
import { openStore } from '../../../server/store/openStore.ts';
import type { Store } from '../../../server/store/store.ts';
import { StoreError } from '../../../server/store/storeError.ts';
import type { FeedMessage } from '../../../shared-types/feed.ts';
import type { SwitchEvent, Warning } from '../../../shared-types/warning.ts';
import { temporaryFolder } from '../store/temporaryFolder.ts';

const warningAt = (at: number): Warning =>
  ({ id: 0, watch: 'w', channels: ['c'], at, outcome: 'open', acknowledgedAt: null }) as unknown as Warning;

/** A journal over a store whose disk is full while `full.now` says so. */
function journalOver() {
  const store = openStore(temporaryFolder(), { commitEvery: 0.001 });
  const full = { now: false };
  const gate =
    <A extends unknown[], R>(method: (...args: A) => Promise<R>) =>
    (...args: A): Promise<R> =>
      full.now ? Promise.reject(new StoreError('FULL', 'no room')) : method(...args);
  const gated = {
    ...store,
    saveWarning: gate(store.saveWarning),
    saveSwitch: gate(store.saveSwitch),
    log: gate(store.log),
  } as Store;
  const said: FeedMessage[] = [];
  const troubles: (string | null)[] = [];
  const journal = createJournal(
    gated,
    0,
    () => 5,
    (message) => said.push(message),
    (text) => troubles.push(text),
  );
  return { store, journal, full, said, troubles };
}

it('tells what it cannot write at once, and writes it when there is room again', async () => {
  const { store, journal, full, said, troubles } = journalOver();
  const [before, during] = [warningAt(1), warningAt(2)];
  journal.issue(before);
  await journal.idle();
  full.now = true;
  journal.issue(during);
  during.acknowledgedAt = 7;
  journal.change(during);
  journal.noteSwitch({ id: 0, watch: 'w', channel: 'c', at: 3 } as SwitchEvent);
  journal.log({ kind: 'note', channel: null, watch: null, by: null, text: 'meanwhile' });
  await journal.idle();
  expect(said.map(({ kind }) => kind)).toEqual(['warning', 'warning', 'warning', 'switch', 'log']);
  expect(troubles.at(-1)).toContain('no room');
  journal.retry();
  await journal.idle();
  expect((await store.warnings({})).map(({ at }) => at)).toEqual([1]);

  full.now = false;
  journal.retry();
  await journal.idle();
  expect(troubles.at(-1)).toBeNull();
  expect((await store.warnings({})).map(({ id, at, acknowledgedAt }) => [id, at, acknowledgedAt])).toEqual([
    [1, 1, null],
    [2, 2, 7],
  ]);
  expect((await store.switches({})).map(({ at }) => at)).toEqual([3]);
  expect((await store.logEntries({})).map(({ text }) => text)).toEqual(['meanwhile']);
  // once each
  journal.retry();
  await journal.idle();
  expect(await store.logEntries({})).toHaveLength(1);
  await store.close();
});

it('does not undo a later change when an earlier one is written late', async () => {
  const { store, journal, full } = journalOver();
  const warning = warningAt(1);
  journal.issue(warning);
  await journal.idle();
  full.now = true;
  journal.change(warning);
  await journal.idle();
  full.now = false;
  warning.acknowledgedAt = 9;
  journal.change(warning);
  await journal.idle();
  journal.retry();
  await journal.idle();
  expect((await store.warnings({}))[0]).toMatchObject({ id: 1, acknowledgedAt: 9 });
  await store.close();
});
