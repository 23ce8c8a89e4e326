import { expect, test } from 'vitest';
import { readRecording } from '../../../server/recordings/readRecording.ts';
import { justBefore } from '../../../server/signal/leaveOut.ts';
import { openStore } from '../../../server/store/openStore.ts';
import type { Mark } from '../../../shared-types/rehearsal.ts';
import { frame, temporaryFolder } from '../store/temporaryFolder.ts';

const mark: Mark = { id: 0, channel: 'A', from: 1000, to: 1000.01, why: 'touched', text: '', by: '' };

/** "A" twice three samples, a hundred seconds apart; "bath" every five seconds from 900 on; "C" beside the first. */
async function stored() {
  const data = temporaryFolder();
  const store = openStore(data, { commitEvery: 0.005 });
  const bath = Array.from({ length: 60 }, (_, i) => (i === 19 ? 40 : 20));
  await store.appendFrames([
    frame(0, 1000, [1, 2, 3]),
    frame(1, 1100, [4, 5, 6]),
    frame(0, 900, bath, { channel: 'bath', dt: 5 }),
    frame(0, 999.98, [7, 8, 9, 10, 11, 12, 13], { channel: 'C' }),
  ]);
  return { data, store };
}

test('other channels are read over the same time, and missing ones are left to whoever needs them', async () => {
  const { data, store } = await stored();
  const { channels } = await readRecording('stored:A/1', { data, channels: ['A', 'C', 'nowhere'] });
  expect(channels.map(({ channel }) => channel)).toEqual(['A', 'C']);
  expect([...channels[1]!.values]).toEqual([9, 10, 11]);
  await store.close();
});

test('marks of any of the channels come with the recording, clipped to it', async () => {
  const { data, store } = await stored();
  await store.saveMark(mark);
  await store.saveMark({ ...mark, channel: 'C', from: 0, to: null, why: 'other', text: 'door open' });
  await store.saveMark({ ...mark, channel: 'bath' });
  const range = { from: 1000, to: 1000.02 };
  expect((await readRecording('stored:A/1', { data })).leftOut).toEqual([
    { from: 1000, to: 1000.01, why: 'touched' },
  ]);
  expect((await readRecording('stored:A/1', { data, channels: ['C'] })).leftOut).toEqual([
    { from: 1000, to: 1000.01, why: 'touched' },
    { ...range, why: 'door open' },
  ]);
  expect((await readRecording('stored:A/2', { data })).leftOut).toEqual([]);
  await store.close();
});

test('a condition holds at the beginning as its channel was before', async () => {
  const { data, store } = await stored();
  await store.saveCondition({ id: 0, channel: 'A', when: 'bath', side: 'above', level: 30 });
  // 40 at 995 s, 20 again at 1000 s
  expect((await readRecording('stored:A/1', { data })).leftOut).toEqual([]);
  await store.appendFrames([frame(2, 1197, [1, 2, 3])]);
  // the bath is not known after its last sample, 1195 s
  expect((await readRecording('stored:A/3', { data })).leftOut).toMatchObject([
    { from: 1197, why: 'bath above 30' },
  ]);
  const all = await readRecording('stored:A', { data, channels: ['bath'] });
  expect(all.leftOut).toEqual([{ from: expect.any(Number), to: 1197.02, why: 'bath above 30' }]);
  expect(justBefore(all.leftOut![0]!.from)).toBe(1195);
  await store.close();
});

test('a condition on a channel that has nothing stored leaves everything out', async () => {
  const { data, store } = await stored();
  await store.saveCondition({ id: 0, channel: 'A', when: 'nowhere', side: 'below', level: 0 });
  expect((await readRecording('stored:A/1', { data })).leftOut).toEqual([
    { from: 1000, to: 1000.02, why: 'nowhere below 0' },
  ]);
  await store.close();
});
