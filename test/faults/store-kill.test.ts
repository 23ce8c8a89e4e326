import { spawn } from 'node:child_process';
import { once } from 'node:events';
import { fileURLToPath } from 'node:url';
import { expect, test } from 'vitest';
import { openStore } from '../../server/store/openStore.ts';
import { temporaryFolder } from '../server/store/temporaryFolder.ts';

const script = fileURLToPath(new URL('./appendUntilKilled.mjs', import.meta.url));

/** Runs the appending process and kills it some time after its first durable frame; the seqs it called durable. */
async function appendAndKill(folder: string, milliseconds: number): Promise<number[]> {
  const child = spawn(process.execPath, [script, folder], { stdio: ['ignore', 'pipe', 'inherit'] });
  let said = '';
  let counting = false;
  child.stdout.on('data', (data: Buffer) => {
    said += data.toString();
    if (counting || !/\n\d+\n/.test(said)) return;
    counting = true;
    setTimeout(() => child.kill('SIGKILL'), milliseconds);
  });
  await once(child, 'close');
  // a number cut off by the kill was not reported
  return (said.match(/^\d+\n/gm) ?? []).map(Number);
}

test('killed at ten moments, every sample reported durable is there once and in order, with its frame record', async () => {
  const folder = temporaryFolder();
  let durable = -1;
  for (let round = 0; round < 10; round++) {
    const reported = await appendAndKill(folder, 3 + 17 * ((round * 7) % 10));
    expect(reported.length).toBeGreaterThan(0);
    durable = Math.max(durable, ...reported);
    const store = openStore(folder, { commitEvery: 0.01 });
    expect(store.notices).toEqual([]);
    const { next, digests } = await store.run('A', 'r');
    expect(next).toBeGreaterThan(durable);
    expect([...digests.keys()]).toEqual(
      Array.from({ length: digests.size }, (_, i) => next - digests.size + i),
    );
    const { times, values } = await store.samplesFrom('A', 0, 1e9);
    expect(values.length).toBe(next * 100);
    expect(values.every((value, i) => value === i)).toBe(true);
    expect(times.every((time, i) => time === Math.floor(i / 100) + (i % 100) * 0.01)).toBe(true);
    const drawn = await store.signalColumns('A', 0, next, 1);
    expect([drawn.low[0], drawn.high[0]]).toEqual([0, next * 100 - 1]);
    expect((await store.channels())[0]).toMatchObject({
      samples: next * 100,
      first: 0,
      value: next * 100 - 1,
    });
    await store.close();
  }
});
