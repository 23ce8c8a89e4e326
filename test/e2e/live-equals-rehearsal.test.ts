import { execFile } from 'node:child_process';
import { writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { promisify } from 'node:util';
import { afterEach, expect, it } from 'vitest';
import { trainingSeries } from '../../server/commands/prepareDemo.ts';
import { createRandom } from '../../server/rigs/random.ts';
import type { SwitchEvent, Warning } from '../../shared-types/warning.ts';
import type { WatchState } from '../../shared-types/watch.ts';
import { type Built, dataFolder, getJson, startBuilt, until } from './support.ts';

const MAIN = fileURLToPath(new URL('../../dist/server/commands/main.js', import.meta.url));
const SEED = 'live equals rehearsal';
const RULE = ['--regime', 'sides:-0.3,0.3', '--least-lead', '10', '--horizon', '20'];

const cleanUp: (() => unknown)[] = [];
afterEach(async () => {
  for (const clean of cleanUp.splice(0).reverse()) await clean();
});

/** Runs the built program; what it printed. */
async function run(...argv: string[]): Promise<string> {
  const { stdout } = await promisify(execFile)(process.execPath, [MAIN, ...argv], { maxBuffer: 2 ** 26 });
  return stdout;
}

interface Rehearsed {
  warnings: { at: number; value: number; outcome: string; lead: number | null }[];
  switches: { at: number; confirmedAt: number; outcome: string }[];
  score: { warnings: { total: number } };
  leftOut: { why: string }[];
}

/** An hour of the demo's loop with late samples, missing values and a gap of 90 s, and a bath with times of its own. */
function recording(file: string): number {
  const { uniform } = createRandom(SEED);
  const loop = trainingSeries('Loop B', 1);
  const rows: [number, string][] = [];
  const shift = (i: number) => (i > 5000 ? 90 : 0);
  loop.times.forEach((time, i) => {
    const value = uniform() < 0.002 ? '' : String(loop.values[i]);
    rows.push([1.7e9 + time + shift(i) + 0.003 * uniform(), `${value},`]);
  });
  const end = 1.7e9 + loop.times.at(-1)! + 90;
  let temperature = 20;
  for (let time = 1.7e9 - 5; time < end - 30; time += 1 + 3 * uniform()) {
    temperature += 0.1 * (20 - temperature) + 3 * (uniform() - 0.5);
    rows.push([time, `,${temperature}`]);
  }
  rows.sort((a, b) => a[0] - b[0]);
  const lines = rows.map(([time, rest]) => `${time.toFixed(6)},${rest}`);
  writeFileSync(file, `time,Loop B,bath\n${lines.join('\n')}\n`);
  return end;
}

async function stand() {
  const folder = dataFolder();
  cleanUp.push(folder.remove);
  const file = join(folder.path, 'run.csv');
  const model = join(folder.path, 'loop-b.json');
  const data = join(folder.path, 'data');
  const end = recording(file);
  await run('rehearse', file, '--channel', 'Loop B', ...RULE, '--out', model);
  return { file, model, data, end };
}

async function watching(options: string[]): Promise<Built> {
  const server = await startBuilt(['--port', '0', ...options]);
  cleanUp.push(() => server.end('SIGTERM'));
  return server;
}

const post = async (port: number, path: string, body: unknown): Promise<void> => {
  const response = await fetch(`http://127.0.0.1:${port}${path}`, {
    method: 'POST',
    body: JSON.stringify(body),
  });
  expect(response.status, await response.text()).toBeLessThan(300);
};

/** What the server says once the watch has seen the last sample that it can. */
async function said(port: number, seen: (watch: WatchState) => boolean) {
  await until(
    'the watch has seen the recording',
    async () => seen((await getJson<WatchState[]>(port, '/api/watches'))[0]!),
    30,
  );
  const warnings = await getJson<Warning[]>(port, '/api/warnings');
  const switches = await getJson<SwitchEvent[]>(port, '/api/switches');
  return {
    warnings: warnings.map(({ at, value, outcome, lead }) => ({ at, value, outcome, lead })),
    switches: switches.map(({ at, confirmedAt, outcome }) => ({ at, confirmedAt, outcome })),
  };
}

const compared = ({ warnings, switches }: Rehearsed) => ({
  warnings: warnings.map(({ at, value, outcome, lead }) => ({ at, value, outcome, lead })),
  switches: switches.map(({ at, confirmedAt, outcome }) => ({ at, confirmedAt, outcome })),
});

it('warns over a WebSocket of exactly what rehearse --json says of the file, to the step and the outcome', async () => {
  const { file, model, data, end } = await stand();
  const { port } = await watching(['--data', data, '--model', model, '--channel', 'Loop B']);
  const to = `ws://127.0.0.1:${port}/ingest`;
  const how = ['--channel', 'Loop B', '--as', 'Loop B', '--times', 'recorded', '--pace', 'max'];
  await run('play', file, '--to', to, ...how);
  const live = await said(port, ({ at }) => at !== null && at > end - 1);

  const found = JSON.parse(await run('rehearse', file, '--model', model, '--json')) as Rehearsed;
  expect(found.warnings.length).toBeGreaterThan(50);
  expect(live).toEqual(compared(found));
});

it('says live what rehearse says of the stored recording, with a stretch marked and a condition on another channel', async () => {
  const { file, model, data, end } = await stand();
  const server = await watching(['--data', data, '--model', model, '--channel', 'Loop B, played']);
  const { port } = server;
  const to = `ws://127.0.0.1:${port}/ingest`;
  const how = ['--times', 'recorded', '--pace', 'max'];
  // the channels must be known before something of them can be left out
  const early = join(data, 'early.csv');
  writeFileSync(early, 'time,Loop B,bath\n1699999700,0,20\n');
  await run('play', early, '--to', to, ...how);
  const channel = 'Loop B, played';
  await post(port, '/api/conditions', { channel, when: 'bath, played', side: 'above', level: 21.5 });
  await post(port, '/api/marks', { channel, from: 1.7e9 + 700, to: 1.7e9 + 830, why: 'calibration' });
  await run('play', file, '--to', to, ...how);
  // the bath ends half a minute early: what comes after it is never decided
  const live = await said(port, ({ at }) => at !== null && at > end - 60);

  const rehearse = ['rehearse', `stored:${channel}`, '--channel', channel, '--data', data, '--json'];
  const found = JSON.parse(await run(...rehearse, '--model', model)) as Rehearsed;
  expect(new Set(found.leftOut.map(({ why }) => why))).toEqual(
    new Set(['calibration', 'bath, played above 21.5']),
  );
  expect(found.warnings.length).toBeGreaterThan(20);
  const settled = live.switches.length;
  expect(live.warnings.map(({ at, value }) => [at, value])).toEqual(
    found.warnings.map(({ at, value }) => [at, value]),
  );
  expect(live.switches).toEqual(compared(found).switches.slice(0, settled));
  expect(found.switches.length - settled).toBeLessThan(3);
});
