import { type ChildProcess, spawn } from 'node:child_process';
import { once } from 'node:events';
import { existsSync } from 'node:fs';
import { writeFile } from 'node:fs/promises';
import { join } from 'node:path';
import { setTimeout as sleep } from 'node:timers/promises';
import { fileURLToPath } from 'node:url';
import { afterEach, expect, it } from 'vitest';
import { createProducer } from '../../server/commands/producer.ts';
import { openStore } from '../../server/store/openStore.ts';
import type { Happening } from '../../server/watch/types.ts';
import { createWatch } from '../../server/watch/watch.ts';
import { swing, swingModel, swingModelJson } from '../server/gateway/harness.ts';
import { temporaryFolder } from '../server/store/temporaryFolder.ts';

const program = fileURLToPath(new URL('../../dist/server/commands/main.js', import.meta.url));
const FRAME = 20;
const FRAMES = 600;

let server: ChildProcess | null = null;
afterEach(() => {
  server?.kill('SIGKILL');
});

/** Starts the built program and waits until it serves; returns its port. */
async function start(folder: string, port: number): Promise<number> {
  const options = ['--no-browser', '--port', String(port), '--data', join(folder, 'data')];
  const watch = ['--model', join(folder, 'model.json'), '--channel', 'c'];
  const child = spawn(process.execPath, [program, 'watch', ...options, ...watch], {
    stdio: ['ignore', 'pipe', 'inherit'],
  });
  server = child;
  let said = '';
  for await (const data of child.stdout) {
    said += String(data);
    const found = /127\.0\.0\.1:(\d+)\/ingest/.exec(said);
    if (found) return Number(found[1]);
  }
  throw new Error(`the server ended before it served: ${said}`);
}

async function stop(signal: 'SIGKILL' | 'SIGTERM'): Promise<number | null> {
  const ended = once(server!, 'close');
  server!.kill(signal);
  return (await ended)[0] as number | null;
}

function neverKilled(): Happening[] {
  const model = swingModel();
  const watch = createWatch({
    model,
    channels: ['c'],
    rule: model.rule,
    regime: model.regime,
    regimeChannel: null,
  });
  const happenings: Happening[] = [];
  watch.push({ channel: 'c', t0: 0, dt: 0.1, times: null, values: swing(0, FRAME * FRAMES) }, happenings);
  return happenings;
}

it('killed and started again while a producer streams, loses no sample and warns as if never killed', async () => {
  expect(existsSync(program), 'npm run build makes the program that this test kills').toBe(true);
  const folder = temporaryFolder();
  await writeFile(join(folder, 'model.json'), swingModelJson());
  const port = await start(folder, 0);
  const producer = createProducer({
    to: `ws://127.0.0.1:${port}/ingest`,
    run: 'the only run',
    channels: [{ channel: 'c', interval: 0.1 }],
  });
  for (let seq = 0; seq < FRAMES; seq++) {
    producer.send('c', { t0: 0.1 * FRAME * seq, dt: 0.1, values: swing(FRAME * seq, FRAME) });
    await sleep(4);
    if (seq % 200 === 150) {
      await stop('SIGKILL');
      await start(folder, port);
    }
  }
  await producer.idle();
  await producer.close();
  expect(await stop('SIGTERM')).toBe(0);

  const store = openStore(join(folder, 'data'), { commitEvery: 0.01 });
  const { values } = await store.samplesFrom('c', 0, 1e9);
  const warnings = await store.warnings({ channel: 'c' });
  const switches = await store.switches({ channel: 'c' });
  await store.close();
  expect(values).toEqual(swing(0, FRAME * FRAMES));

  const expected = neverKilled();
  const told = (kind: Happening['kind']) => expected.filter((happening) => happening.kind === kind);
  expect(told('warning').length).toBeGreaterThan(50);
  const at = (list: { at?: number }[]) => list.map((each) => each.at);
  // Frames end at other multiples of 0.1 than one long frame, by rounding alone.
  const close = (left: (number | undefined)[], right: (number | undefined)[]) => {
    expect(left).toHaveLength(right.length);
    left.forEach((time, i) => void expect(time).toBeCloseTo(right[i]!, 9));
  };
  close(at(warnings), at(told('warning') as { at: number }[]));
  close(at(switches), at(told('switch') as { at: number }[]));
  const outcomes = told('graded') as Extract<Happening, { kind: 'graded' }>[];
  expect(warnings.slice(0, outcomes.length).map(({ outcome }) => outcome)).toEqual(
    outcomes.map(({ outcome }) => outcome),
  );
});
