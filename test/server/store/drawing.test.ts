import { expect, test } from 'vitest';
import { openStore } from '../../../server/store/openStore.ts';
import { frame, temporaryFolder } from './temporaryFolder.ts';

test('few samples are drawn one by one, at their own times, and a NaN breaks the line', async () => {
  const store = openStore(temporaryFolder(), { commitEvery: 0.005 });
  await store.appendFrames([frame(0, 0, [1, 2, Number.NaN, 4])]);
  const { t, low, high } = await store.signalColumns('A', 0, 0.03, 100);
  expect([...low]).toEqual([1, 2, Number.NaN, 4]);
  expect(high).toEqual(low);
  expect([t[0], t[1], t[3]]).toEqual([0, 0.01, 0.03]);
  expect(t[2]).toBeGreaterThan(0.01);
  expect(t[2]).toBeLessThan(0.03);
  await store.close();
});

test('up to twice as many samples as columns are drawn one by one, at Unix times too', async () => {
  const store = openStore(temporaryFolder(), { commitEvery: 0.005 });
  const values = Float64Array.from({ length: 1001 }, (_, i) => i);
  await store.appendFrames([frame(0, 1.7e9, values, { dt: 0.001 })]);
  const { low, high } = await store.signalColumns('A', 1.7e9, 1.7e9 + 1.001, 1000);
  expect([low, high]).toEqual([values, values]);
  await store.close();
});

test('missing time breaks the line at any depth of the pyramid, jitter does not', async () => {
  const store = openStore(temporaryFolder(), { commitEvery: 0.005 });
  const values = new Float64Array(50_000).fill(1);
  const jittered = Float64Array.from(values, (_, i) => 2000 + i * 0.01 + (i % 2) * 0.004);
  await store.appendFrames([
    frame(0, 0, values),
    frame(1, 1000, values),
    frame(2, 0, values, { times: jittered }),
  ]);
  for (const columns of [50, 500, 3000]) {
    const { t, low } = await store.signalColumns('A', 0, 2500, columns);
    const breaks = [...t].filter((_, k) => Number.isNaN(low[k]!));
    expect(breaks, `${columns} columns`).toHaveLength(2);
    expect(breaks[0]).toBeGreaterThan(499.99);
    expect(breaks[0]).toBeLessThan(1000);
    expect(t.length).toBeLessThanOrEqual(columns + 2);
  }
  await store.close();
});

test('a rig with elapsed time that is started again draws what arrived last', async () => {
  const store = openStore(temporaryFolder(), { commitEvery: 0.005 });
  await store.appendFrames([frame(0, 0, new Float64Array(2000).fill(1))]);
  await store.appendFrames([frame(0, 0, new Float64Array(1000).fill(2), { run: 'run 2' })]);
  const { t, low, high } = await store.signalColumns('A', 0, 20, 40);
  t.forEach((time, k) => {
    expect([low[k], high[k]]).toEqual(time < 10 ? [2, 2] : [1, 1]);
  });
  await store.close();
});

test('an unknown channel and an empty range draw nothing', async () => {
  const store = openStore(temporaryFolder(), { commitEvery: 0.005 });
  await store.appendFrames([frame(0, 0, [1])]);
  expect((await store.signalColumns('B', 0, 1, 10)).t.length).toBe(0);
  expect((await store.signalColumns('A', 5, 6, 10)).t.length).toBe(0);
  expect((await store.traceColumns('none', 0, 1, 10)).t.length).toBe(0);
  await store.close();
});

test('recordings are cut where nothing came for longer than the gap, also within one node of the pyramid', async () => {
  const store = openStore(temporaryFolder(), { commitEvery: 0.005 });
  await store.appendFrames([
    frame(0, 0, new Float64Array(5000)),
    frame(1, 100, new Float64Array(10)),
    frame(2, 161, new Float64Array(40_000)),
    frame(3, 700, [Number.NaN, 1, Number.NaN]),
  ]);
  expect((await store.recordings(60)).map(({ name, samples, ordinal }) => [name, samples, ordinal])).toEqual([
    ['A/1', 5010, 0],
    ['A/2', 40_000, 5010],
    ['A/3', 1, 45_011],
  ]);
  expect(await store.recordings(1000)).toHaveLength(1);
  await store.close();
});
