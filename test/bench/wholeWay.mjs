// The whole way: WebSocket -> watch -> store, and from a frame's arrival to its warning on the wire.
// node test/bench/wholeWay.mjs [seconds]      (after npm run build; prints one JSON document)
import { spawn } from 'node:child_process';
import { mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { decode } from 'cbor-x';
import { WebSocket } from 'ws';
import { createProducer } from '../../dist/server/commands/producer.js';

const CHANNELS = 16;
const FRAME = 100;
const DELAYS = 100;
const RANK = 15;
const INTERVAL = 0.001;
const seconds = Number(process.argv[2] ?? 5);
const program = new URL('../../dist/server/commands/main.js', import.meta.url).pathname;
const folder = mkdtempSync(join(tmpdir(), 'foreshift-bench-'));
writeFileSync(join(folder, 'settings.json'), JSON.stringify({ ingestWindow: 2048 }));

const { modelToJson } = await import('../../dist/server/model/modelFile.js');
const model = {
  name: 'bench', interval: INTERVAL, delays: DELAYS, rank: RANK, center: 'mean',
  channels: [{ channel: 'c', unit: '', mean: 0, scale: 1 }],
  coordinates: Float64Array.from({ length: DELAYS * RANK }, (_, i) => Math.sin(i * 1.7) / DELAYS),
  singularValues: new Float64Array(RANK).fill(1), spectrum: new Float64Array(DELAYS).fill(1),
  A: new Float64Array((RANK - 1) ** 2), B: new Float64Array(RANK - 1),
  diagnostics: {
    r2: new Float64Array(RANK - 1), forcing: { kurtosis: 0, share: 0 }, antisymmetryDefect: 0, eigenvalues: [],
    heldOut: null, method: 'lagged products (double-double)', rankChoice: 'given', windowChoice: 'given',
    samples: 1, windows: 1, seconds: 0,
  },
  gapIntervals: 3,
  rule: { variable: 'level', direction: 'rising', threshold: 100, rearm: 50, onDelay: 0, holdOff: 0, leastLead: 1, horizon: 3 },
  regime: { kind: 'sides', low: -1, high: 1 }, regimeChannel: null, switchWord: 'switch', validity: null, score: null,
  provenance: { recordings: [], program: 'bench', fittedAt: '2026-01-01T00:00:00Z' },
};

const server = spawn(process.execPath, [program, 'watch', '--no-browser', '--port', '0', '--data', folder], {
  stdio: ['ignore', 'pipe', 'inherit'],
});
process.on('exit', () => server.kill('SIGKILL'));
const port = await new Promise((resolve) => {
  let said = '';
  server.stdout.on('data', (data) => {
    said += data;
    const found = /127\.0\.0\.1:(\d+)\/ingest/.exec(said);
    if (found) resolve(Number(found[1]));
  });
});
const base = `http://127.0.0.1:${port}`;
const post = async (path, body) => {
  const response = await fetch(base + path, { method: 'POST', body });
  if (!response.ok) throw new Error(await response.text());
};
const names = Array.from({ length: CHANNELS }, (_, i) => `channel ${i}`);
await post('/api/models', modelToJson(model));
for (const name of names)
  await post('/api/watches', JSON.stringify({ model: 'bench', channels: [name], reaction: 0 }));

const producer = createProducer({
  to: `ws://127.0.0.1:${port}/ingest`, run: 'bench', channels: names.map((channel) => ({ channel, interval: INTERVAL })),
});
const values = Float64Array.from({ length: FRAME }, (_, i) => 0.5 * Math.sin(i / 20));
let frame = 0;
const round = (from) => {
  for (const name of names) producer.send(name, { t0: frame * FRAME * INTERVAL, dt: INTERVAL, values: from });
  frame++;
};
const started = performance.now();
while (performance.now() - started < 1000 * seconds) {
  await producer.room();
  for (let i = 0; i < 8; i++) round(values);
  await new Promise((resolve) => setImmediate(resolve));
}
await producer.idle();
const throughput = (frame * FRAME * CHANNELS) / ((performance.now() - started) / 1000);

// Latency: one frame with a spike at a time, until the warning frame is on the page's socket.
const page = new WebSocket(`ws://127.0.0.1:${port}/feed`, 'foreshift.feed.1');
await new Promise((resolve) => page.once('open', resolve));
const spike = values.slice();
spike[FRAME - 1] = 1000;
const taken = [];
for (let i = 0; i < 200; i++) {
  const sent = performance.now();
  const heard = new Promise((resolve) => {
    const listen = (data) => {
      const message = decode(data);
      if (message.kind !== 'warning' || message.warning.outcome !== 'open' || message.warning.deliveredAt !== null) return;
      page.off('message', listen);
      resolve(performance.now() - sent);
    };
    page.on('message', listen);
  });
  producer.send(names[0], { t0: frame * FRAME * INTERVAL, dt: INTERVAL, values: spike });
  frame++;
  taken.push(await heard);
  producer.send(names[0], { t0: frame * FRAME * INTERVAL, dt: INTERVAL, values });
  frame++;
  await new Promise((resolve) => setTimeout(resolve, 20));
}
taken.sort((a, b) => a - b);
page.terminate();
await producer.close();
server.kill('SIGTERM');
await new Promise((resolve) => server.once('close', resolve));
rmSync(folder, { recursive: true, force: true });
const at = (share) => Number(taken[Math.floor(share * (taken.length - 1))].toFixed(2));
process.stdout.write(
  `${JSON.stringify({ channels: CHANNELS, samplesAFrame: FRAME, delays: DELAYS, rank: RANK, samplesPerSecond: Math.round(throughput), warningMilliseconds: { p50: at(0.5), p95: at(0.95), p99: at(0.99) } })}\n`,
);
process.exit(0);
