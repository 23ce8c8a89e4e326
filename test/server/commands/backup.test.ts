import { mkdtempSync, readFileSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { afterEach, expect, it, vi } from 'vitest';
import { main } from '../../../server/commands/main.ts';
import { openStore } from '../../../server/store/openStore.ts';
import { frame, temporaryFolder } from '../store/temporaryFolder.ts';

afterEach(() => {
  vi.restoreAllMocks();
});

/** Runs a command in this process: its exit code and what it wrote. */
async function run(...argv: string[]) {
  const [out, err] = ['stdout', 'stderr'].map((name) => {
    const written: string[] = [];
    vi.spyOn(process[name as 'stdout'], 'write').mockImplementation((text) => {
      written.push(String(text));
      return true;
    });
    return written;
  }) as [string[], string[]];
  const code = await main(argv);
  vi.restoreAllMocks();
  return { code, out: out.join(''), err: err.join('') };
}

async function dataFolder(): Promise<string> {
  const data = temporaryFolder();
  const store = openStore(data, { commitEvery: 0.005 });
  await store.appendFrames([frame(0, 0, [1, 2, 3])]);
  await store.close();
  writeFileSync(join(data, 'settings.json'), '{"recordingGap": 30}');
  return data;
}

it('copies a data folder into a file and the file into an empty folder', async () => {
  const data = await dataFolder();
  const file = join(temporaryFolder(), 'new', 'copy.db');
  const copied = await run('backup', '--data', data, '--to', file, '--json');
  expect([copied.code, copied.err]).toEqual([0, '']);
  expect(JSON.parse(copied.out)).toMatchObject({ file, channels: 1, samples: 3 });
  const target = join(temporaryFolder(), 'restored');
  const restored = await run('restore', file, '--data', target);
  expect([restored.code, restored.err]).toEqual([0, '']);
  expect(restored.out).toContain('3 samples of 1 channel, 0 warnings');
  expect(readFileSync(join(target, 'settings.json'), 'utf8')).toBe('{"recordingGap": 30}');
  const store = openStore(target, { commitEvery: 0.005 });
  expect([...(await store.samplesFrom('A', 0, 9)).values]).toEqual([1, 2, 3]);
  await store.close();
});

it('copies while a server runs on the folder, and puts nothing into a folder that a server runs on', async () => {
  const data = await dataFolder();
  const store = openStore(data, { commitEvery: 0.005 });
  const file = join(temporaryFolder(), 'copy.db');
  expect((await run('backup', '--data', data, '--to', file)).code).toBe(0);
  const refused = await run('restore', file, '--data', data);
  expect(refused.code).toBe(2);
  expect(refused.err).toMatch(/a Foreshift server runs on .*; stop it/);
  await store.close();
});

it('answers what cannot be done with one sentence and exit code 2', async () => {
  const data = await dataFolder();
  const file = join(temporaryFolder(), 'copy.db');
  await run('backup', '--data', data, '--to', file);
  const empty = temporaryFolder();
  const text = join(mkdtempSync(join(empty, 'x')), 'text.csv');
  writeFileSync(text, 'time,c\n');
  const asks: [RegExp, string[]][] = [
    [/is there already/, ['backup', '--data', data, '--to', file]],
    [/nowhere to copy to/, ['backup', '--data', data]],
    [/there is no foreshift\.db in/, ['backup', '--data', temporaryFolder(), '--to', join(empty, 'b')]],
    [/0 files are named/, ['restore', '--data', join(empty, 'r')]],
    [/there is no file/, ['restore', join(empty, 'none'), '--data', join(empty, 'r')]],
    [/is no backup/, ['restore', text, '--data', join(empty, 'r')]],
    [/is not empty \(it holds .*foreshift\.db/, ['restore', file, '--data', data]],
  ];
  for (const [sentence, argv] of asks) {
    const { code, out, err } = await run(...argv);
    expect([code, out], argv.join(' ')).toEqual([2, '']);
    expect(err).toMatch(sentence);
    expect(err.trim().split('\n')).toHaveLength(1);
  }
});

it.each(['backup', 'restore'])('shows an example in the help of %s', async (command) => {
  const { code, out } = await run(command, '--help');
  expect(code).toBe(0);
  expect(out).toMatch(new RegExp(`example[\\s\\S]*foreshift ${command}`));
});
