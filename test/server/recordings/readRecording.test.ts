import { createHash } from 'node:crypto';
import { writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { expect, test } from 'vitest';
import { cutRange } from '../../../server/recordings/cutRange.ts';
import { pickChannel } from '../../../server/recordings/pickChannel.ts';
import { readRecording } from '../../../server/recordings/readRecording.ts';
import { openStore } from '../../../server/store/openStore.ts';
import { frame, temporaryFolder } from '../store/temporaryFolder.ts';

async function folderWithTwoRecordings(): Promise<string> {
  const data = temporaryFolder();
  const store = openStore(data, { commitEvery: 0.005 });
  await store.saveChannel({ channel: 'A', unit: 'K', label: '', interval: 0.01, low: null, high: null });
  await store.appendFrames([frame(0, 1000, [1, 2, 3]), frame(1, 1100, [4, 5])]);
  await store.close();
  return data;
}

test('a file is read by its path', async () => {
  const path = join(temporaryFolder(), 'run.csv');
  writeFileSync(path, 't,x\n0,1\n1,2\n');
  const recording = await readRecording(path, {});
  expect(recording.name).toBe(path);
  expect([...pickChannel(recording, 'x').values]).toEqual([1, 2]);
});

test('all that a channel has stored, or its Nth recording cut at a long gap, is read while a server writes', async () => {
  const data = await folderWithTwoRecordings();
  const server = openStore(data, { commitEvery: 0.005 });
  const all = await readRecording('stored:A', { data });
  expect([...all.channels[0]!.values]).toEqual([1, 2, 3, 4, 5]);
  expect(all.channels[0]!.unit).toBe('K');
  const { times, values } = all.channels[0]!;
  expect(all.sha256).toBe(
    createHash('sha256').update(Buffer.from(times.buffer)).update(Buffer.from(values.buffer)).digest('hex'),
  );
  const second = await readRecording('stored:A/2', { data });
  expect([...second.channels[0]!.values]).toEqual([4, 5]);
  expect(second.channels[0]!.times[0]).toBe(1100);
  await server.close();
});

test('the settings of the folder say what a long gap is', async () => {
  const data = await folderWithTwoRecordings();
  writeFileSync(join(data, 'settings.json'), '{"recordingGap": 1000}');
  expect((await readRecording('stored:A/1', { data })).channels[0]!.values.length).toBe(5);
});

test('runs in elapsed time are recordings of their own though their times overlap', async () => {
  const data = temporaryFolder();
  const store = openStore(data, { commitEvery: 0.005 });
  await store.appendFrames([frame(0, 0, [1, 2, 3, 4])]);
  await store.appendFrames([frame(0, 0, [5, 6, 7], { run: 'run 2' })]);
  await store.close();
  expect([...(await readRecording('stored:A/1', { data })).channels[0]!.values]).toEqual([1, 2, 3, 4]);
  expect([...(await readRecording('stored:A/2', { data })).channels[0]!.values]).toEqual([5, 6, 7]);
  expect([...(await readRecording('stored:A', { data })).channels[0]!.values]).toEqual([5, 6, 7, 4]);
});

test('what is not there is answered with what there is', async () => {
  const data = await folderWithTwoRecordings();
  const cases: [string, string, string][] = [
    [join(data, 'none.csv'), 'NO_FILE', 'none.csv'],
    [data, 'NOT_A_FILE', 'folder'],
    ['stored:B', 'NO_RECORDING', 'stored:A'],
    ['stored:A/3', 'NO_RECORDING', 'stored:A/2'],
  ];
  for (const [name, code, part] of cases)
    await expect(readRecording(name, { data }), name).rejects.toMatchObject({
      code,
      message: expect.stringContaining(part),
    });
  await expect(readRecording('stored:A', { data: temporaryFolder() })).rejects.toMatchObject({
    code: 'NO_STORE',
  });
});

test('a channel that a recording lacks is answered with those it has', () => {
  const recording = {
    name: 'r',
    sha256: '',
    channels: [{ channel: 'left', unit: '', times: new Float64Array(0), values: new Float64Array(0) }],
  };
  expect(() => pickChannel(recording, 'right')).toThrow(
    expect.objectContaining({ code: 'NO_SUCH_CHANNEL', message: expect.stringContaining('"left"') }),
  );
});

test('a range is seconds from the first sample or RFC 3339, both ends included', () => {
  const times = Float64Array.from({ length: 10 }, (_, i) => 1715904000 + i);
  const recording = { name: 'r', sha256: 'x', channels: [{ channel: 'x', unit: '', times, values: times }] };
  const cut = (from?: string | number, to?: string | number) =>
    [...cutRange(recording, from, to).channels[0]!.times].map((t) => t - 1715904000);
  expect(cut(2, 4)).toEqual([2, 3, 4]);
  expect(cut('7')).toEqual([7, 8, 9]);
  expect(cut(undefined, '2024-05-17T00:00:01.5Z')).toEqual([0, 1]);
  expect(cut()).toHaveLength(10);
  expect(() => cut('noon')).toThrow(
    expect.objectContaining({ code: 'BAD_TIME', message: expect.stringContaining('--from "noon"') }),
  );
  expect(() => cut(20, 30)).toThrow(
    expect.objectContaining({ code: 'EMPTY_RANGE', message: expect.stringContaining('0 to 9 s') }),
  );
});
