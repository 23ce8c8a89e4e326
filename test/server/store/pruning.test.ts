import { expect, test } from 'vitest';
import { openStore } from '../../../server/store/openStore.ts';
import type { PruneRules, PruneStep } from '../../../server/store/pruneRules.ts';
import type { Store } from '../../../server/store/store.ts';
import type { SwitchEvent } from '../../../shared-types/warning.ts';
import { frame, temporaryFolder } from './temporaryFolder.ts';

const BLOCK = 1024;
const DT = 0.01;
const value = (i: number) => Math.sin(i) + i / 1000;

const rules = (rest: Partial<PruneRules>): PruneRules => ({
  now: Date.now() / 1000,
  keepFor: null,
  largestBytes: null,
  recordingGap: 60,
  switches: [],
  stretches: [],
  needed: [],
  ...rest,
});
/** everything goes that may */
const nothingStays = { largestBytes: 1 };

/** Steps until there is nothing more to do; what they came to together, and the milliseconds of the longest. */
async function prune(store: Store, rest: Partial<PruneRules>) {
  let [samples, longest, step] = [0, 0, null as PruneStep | null];
  do {
    const began = performance.now();
    step = await store.prune(rules(rest));
    longest = Math.max(longest, performance.now() - began);
    samples += step.samples;
  } while (step.more);
  return { ...step, samples, longest };
}

/** A store with `blocks` blocks on channel A: sample i is value(i) at DT·i; after each of `breaks` samples come 100 s of nothing. */
async function filled(blocks: number, breaks: number[] = []) {
  const store = openStore(temporaryFolder(), { commitEvery: 0.001 });
  const cuts = [0, ...breaks, blocks * BLOCK];
  const times: number[] = [];
  for (let k = 1; k < cuts.length; k++) {
    const [from, to] = [cuts[k - 1]!, cuts[k]!];
    const values = Array.from({ length: to - from }, (_, i) => value(from + i));
    const t0 = from * DT + (k - 1) * 100;
    await store.appendFrames([frame(k, t0, values)]);
    for (let i = 0; i < values.length; i++) times.push(t0 + i * DT);
  }
  return { store, times };
}

async function readAll(store: Store) {
  const ordinals: number[] = [];
  const times: number[] = [];
  const values: number[] = [];
  for (let at = 0; ; ) {
    const block = await store.samplesFrom('A', at, 700);
    if (block.values.length === 0) return { ordinals, times, values };
    times.push(...block.times);
    values.push(...block.values);
    if (block.next === block.ordinal + block.values.length)
      ordinals.push(...block.values.map((_, i) => block.ordinal + i));
    else ordinals.push(...Array(block.values.length).fill(Number.NaN));
    at = block.next;
  }
}

const switchAt = (at: number): SwitchEvent =>
  ({
    id: 0,
    watch: 'w',
    channel: 'A',
    at,
    confirmedAt: at,
    from: 0,
    to: 1,
    outcome: 'pending',
  }) as SwitchEvent;

test('the oldest blocks go, the newest stays, and what is read of the rest has its times, values and ordinals', async () => {
  const { store, times } = await filled(10);
  const { samples } = await prune(store, nothingStays);
  expect(samples).toBe(9 * BLOCK);
  const kept = await readAll(store);
  expect(kept.ordinals).toEqual(Array.from({ length: BLOCK }, (_, i) => 9 * BLOCK + i));
  expect(kept.times).toEqual(times.slice(9 * BLOCK));
  expect(kept.values).toEqual(kept.ordinals.map(value));
  expect((await store.channels())[0]).toMatchObject({ samples: 10 * BLOCK, first: 0 });
  // and it goes on where it was, also in the pyramid
  await store.appendFrames([
    frame(
      99,
      200,
      Array.from({ length: 3 * BLOCK }, (_, i) => value(i)),
    ),
  ]);
  expect((await readAll(store)).ordinals.at(-1)).toBe(13 * BLOCK - 1);
  const drawn = await store.signalColumns('A', 200, 200 + 3 * BLOCK * DT, 3);
  const drawnHigh = Math.max(...drawn.high);
  expect(drawnHigh).toBe(Math.max(...Array.from({ length: 3 * BLOCK }, (_, i) => value(i))));
  await store.close();
});

test('what surrounds a switch stays, from before it to after it, on the channel and on the trace of its watch', async () => {
  const { store, times } = await filled(40);
  await store.saveWatch({ watch: 'w', settings: '{}', snapshot: null });
  const trace = { times: Float64Array.from(times), values: Float64Array.from(times) };
  await store.saveProgress([{ watch: 'w', snapshot: Uint8Array.of(1), trace }]);
  await store.saveSwitch(switchAt(200));
  const switches = [{ watch: 'w', channels: ['A'], before: 30, after: 10 }];
  await prune(store, { ...nothingStays, switches });
  const { times: left } = await readAll(store);
  const within = times.filter((time) => time >= 170 && time <= 210);
  expect(within.length).toBeGreaterThan(3900);
  expect(left).toEqual(expect.arrayContaining(within));
  // no more than a block beyond either end, and the newest block
  const others = left.filter((time) => (time < 170 || time > 210) && time < times[39 * BLOCK]!);
  expect(others.length).toBeLessThan(2 * BLOCK);
  const drawn = await store.traceColumns('w', 170, 210, 40);
  expect([drawn.t[0], Math.max(...drawn.high)]).toEqual([170, 210]);
  expect((await store.traceColumns('w', 0, 150, 40)).t).toHaveLength(0);
  await store.close();
});

test('what a snapshot needs and what a model was fitted on stay', async () => {
  const { store } = await filled(20);
  const { short } = await prune(store, {
    ...nothingStays,
    needed: [{ channel: 'A', ordinal: 15 * BLOCK + 7 }],
    stretches: [{ channel: 'A', from: 3 * BLOCK * DT, to: 4.5 * BLOCK * DT }],
  });
  const { values } = await readAll(store);
  const blocks = new Set(values.map((_, i) => i).map((i) => i));
  expect(blocks.size).toBe((2 + 5) * BLOCK + (values.length - 7 * BLOCK));
  const first = await store.samplesFrom('A', 0, 1);
  // block 2 ends where the stretch begins: it is kept with it
  expect(Math.floor(first.ordinal / BLOCK)).toBe(2);
  expect((await store.samplesFrom('A', 15 * BLOCK, 9)).ordinal).toBe(15 * BLOCK);
  expect((await store.samplesFrom('A', 5 * BLOCK, 1)).ordinal).toBe(15 * BLOCK);
  expect(short).toBeGreaterThan(0);
  await store.close();
});

test('a pruned stretch is drawn as a gap at every width, and what is left of the pyramid is the least and greatest', async () => {
  const { store, times } = await filled(80);
  await store.saveWatch({ watch: 'w', settings: '{}', snapshot: null });
  for (const at of [300, 600]) await store.saveSwitch(switchAt(at));
  await prune(store, {
    ...nothingStays,
    switches: [{ watch: 'w', channels: ['A'], before: 20, after: 5 }],
  });
  const kept = await readAll(store);
  const hole = (t: number) => !kept.times.some((time) => Math.abs(time - t) < 30);
  expect([hole(150), hole(300), hole(450)]).toEqual([true, false, true]);
  for (const columns of [3, 20, 200, 2000]) {
    const drawn = await store.signalColumns('A', 0, times.at(-1)!, columns);
    const high = Math.max(...drawn.high.filter((h) => !Number.isNaN(h)));
    expect(high).toBe(Math.max(...kept.values));
    if (columns < 20) continue;
    const breaks = drawn.t.filter((_, k) => Number.isNaN(drawn.low[k]!));
    expect(
      breaks.some((t) => t > 300 && t < 600),
      `${columns} columns`,
    ).toBe(true);
    for (const [k, t] of drawn.t.entries())
      if (!Number.isNaN(drawn.low[k]!)) expect(kept.times.some((time) => Math.abs(time - t) < 1)).toBe(true);
  }
  await store.close();
});

test('recordings keep their numbers when older ones go, and one that lost its middle is still one', async () => {
  const { store } = await filled(40, [5 * BLOCK + 100, 9 * BLOCK + 200, 30 * BLOCK]);
  const before = await store.recordings(60);
  expect(before.map(({ name }) => name)).toEqual(['A/1', 'A/2', 'A/3', 'A/4']);
  const middle = before[2]!;
  await store.saveWatch({ watch: 'w', settings: '{}', snapshot: null });
  await store.saveSwitch(switchAt(middle.from + 50));
  await store.saveSwitch(switchAt(middle.from + 150));
  await prune(store, {
    ...nothingStays,
    switches: [{ watch: 'w', channels: ['A'], before: 2, after: 2 }],
  });
  const after = await store.recordings(60);
  expect(after.map(({ name }) => name)).toEqual(['A/3', 'A/4']);
  expect(after[0]!.samples).toBeLessThan(5 * BLOCK);
  expect(after[0]!.from).toBeGreaterThan(middle.from);
  const block = await store.samplesFrom('A', after[0]!.ordinal, after[0]!.samples);
  expect([block.times[0], block.times.at(-1), block.times.length]).toEqual([
    after[0]!.from,
    after[0]!.to,
    after[0]!.samples,
  ]);
  await store.close();
});

test('what is older than is kept goes by when it arrived, not by its own time', async () => {
  let now = 1e9;
  const store = openStore(temporaryFolder(), { commitEvery: 0.001, now: () => now });
  const long = new Float64Array(4 * BLOCK);
  await store.appendFrames([frame(0, 5e8, long)]);
  now += 2000;
  await store.appendFrames([frame(1, 6e8, long)]);
  now += 2000;
  await store.appendFrames([frame(2, 7e8, long)]);
  expect((await prune(store, { keepFor: 3600, now: 1e9 + 3500 })).samples).toBe(0);
  // the last block of the first frame ended no sooner than the second came
  expect((await prune(store, { keepFor: 3600, now: 1e9 + 5500 })).samples).toBe(3 * BLOCK);
  expect((await prune(store, { keepFor: 3600, now: 1e9 + 7500 })).samples).toBe(4 * BLOCK);
  expect((await store.samplesFrom('A', 0, 1)).times[0]).toBeGreaterThan(6e8);
  await store.close();
});

test('an overlapping older segment is seen again where the newer one was pruned', async () => {
  const store = openStore(temporaryFolder(), { commitEvery: 0.001 });
  const ramp = (k: number) => Array.from({ length: 4 * BLOCK }, (_, i) => k * 1e6 + i);
  await store.appendFrames([frame(0, 0, ramp(1)), frame(1, 0, ramp(2)), frame(2, 0, ramp(3))]);
  await prune(store, { ...nothingStays });
  const { values } = await store.samplesBetween('A', 0, 1e9);
  expect(values).toEqual(Float64Array.from(ramp(3).slice(3 * BLOCK)));
  expect((await store.recordings(60)).map(({ name }) => name)).toEqual(['A/3']);
  await store.close();
});
