import { expect, test } from 'vitest';
import type { LogbookQuery, LogbookRow } from '../../../server/store/logbook.ts';
import { openStore } from '../../../server/store/openStore.ts';
import type { Store } from '../../../server/store/store.ts';
import type { LogEntry, SwitchEvent, Warning } from '../../../shared-types/warning.ts';
import { temporaryFolder } from './temporaryFolder.ts';

const T0 = 1_700_000_000;

const warning = (at: number, channel = 'A', watch = 'w') =>
  ({ id: 0, watch, channels: [channel, 'B'], at, madeAt: T0 + 500, outcome: 'open' }) as unknown as Warning;
const switched = (at: number, channel = 'A', loggedAt?: number) =>
  ({ id: 0, watch: 'w', channel, at, outcome: 'warned', loggedAt }) as unknown as SwitchEvent;
const entry = (
  time: number,
  kind: LogEntry['kind'],
  channel: string | null = null,
  watch: string | null = null,
) => ({ time, kind, channel, watch, by: null, text: kind });

/** Seven lines: two warnings, two switches, three of the log; told in another order than that of time. */
async function filled(): Promise<Store> {
  const store = openStore(temporaryFolder(), { commitEvery: 0.005 });
  await Promise.all([
    store.log(entry(T0 + 5, 'note')),
    store.saveSwitch(switched(T0 + 20)),
    store.saveWarning(warning(T0 + 10)),
    store.saveWarning(warning(T0 + 30, 'C', 'v')),
    store.log(entry(T0 + 12, 'acknowledged', null, 'w')),
    store.log(entry(T0 + 40, 'gap', 'A')),
    store.saveSwitch(switched(T0 + 35, 'C')),
  ]);
  return store;
}

const seconds = (rows: LogbookRow[]) => rows.map(({ source, time }) => `${source} ${time - T0}`);
const lines = async (query: Partial<LogbookQuery>) =>
  seconds(await (await filled()).logbook({ most: 100, ...query }));

const ALL = ['log 40', 'switch 35', 'warning 30', 'switch 20', 'log 12', 'warning 10', 'log 5'];

test('the logbook has warnings, switches and the log in one order of time', async () => {
  expect(await lines({})).toEqual(ALL);
  expect(await lines({ oldestFirst: true })).toEqual([...ALL].reverse());
});

test('pages of any size, each from where the last ended, make the whole, also where times are equal', async () => {
  const store = await filled();
  await Promise.all([1, 2, 3].map(() => store.log(entry(T0 + 20, 'note'))));
  await store.saveWarning(warning(T0 + 20, 'A', 'x'));
  const whole = await store.logbook({ most: 100 });
  expect(whole).toHaveLength(11);
  for (const most of [1, 2, 3, 5]) {
    const pages: LogbookRow[] = [];
    for (;;) {
      const after = pages.at(-1);
      const page = await store.logbook({ most, ...(after === undefined ? {} : { after }) });
      pages.push(...page);
      if (page.length < most) break;
    }
    expect(pages).toEqual(whole);
  }
});

test('kinds, channel, watch, range and keys restrict it', async () => {
  expect(await lines({ kinds: ['warning'] })).toEqual(['warning 30', 'warning 10']);
  expect(await lines({ kinds: ['switch', 'gap'] })).toEqual(['log 40', 'switch 35', 'switch 20']);
  expect(await lines({ kinds: [] })).toEqual([]);
  expect(await lines({ channel: 'C' })).toEqual(['switch 35', 'warning 30']);
  expect(await lines({ watch: 'w' })).toEqual(['switch 35', 'switch 20', 'log 12', 'warning 10']);
  expect(await lines({ from: T0 + 12, to: T0 + 30 })).toEqual(['warning 30', 'switch 20', 'log 12']);
  expect(await lines({ keys: ['warning 1', 'log 3', 'log 99'] })).toEqual(['log 40', 'warning 10']);
});

test('what the log says of a watch belongs to the watch’s channel where it names none', async () => {
  expect(await lines({ channel: 'A', watchesOfChannel: ['w'] })).toEqual([
    'log 40',
    'switch 20',
    'log 12',
    'warning 10',
  ]);
});

test('elapsed time is put among times of day by the server’s clock', async () => {
  const store = await filled();
  await store.saveWarning(warning(3.5));
  await store.saveSwitch(switched(7.25, 'A', T0 + 501));
  expect(seconds(await store.logbook({ most: 3 }))).toEqual(['switch 501', 'warning 500', 'log 40']);
});

test('a page of a long log is found by its index', async () => {
  const store = openStore(temporaryFolder(), { commitEvery: 0.05 });
  await Promise.all(Array.from({ length: 20_000 }, (_, i) => store.log(entry(T0 + i, 'note'))));
  const find = (after: number) => {
    const began = performance.now();
    return store
      .logbook({ most: 200, after: { source: 'log', id: after, time: T0 + after - 1 } })
      .then((rows) => ({ rows, took: performance.now() - began }));
  };
  await find(15_000);
  const { rows, took } = await find(10_000);
  expect(rows[0]!.time).toBe(T0 + 9_998);
  expect(rows).toHaveLength(200);
  // reading all twenty thousand lines takes some forty milliseconds
  expect(took).toBeLessThan(20);
  await store.close();
});
