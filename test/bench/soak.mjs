// A long run at ten times the demo's rate with a page open: do heap, memory and lag stay as they are?
// npm run soak [-- minutes [times]]     (after npm run build; default 10 minutes, 10 times; exit code 1 when they grow)
import { fork } from 'node:child_process';
import { existsSync, mkdtempSync, rmSync, statSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { decode } from 'cbor-x';
import { chromium } from 'playwright-core';
import { WebSocket } from 'ws';
import { prepareDemo } from '../../dist/server/commands/prepareDemo.js';
import { createProducer } from '../../dist/server/commands/producer.js';
import { createDemoSource } from '../../dist/server/commands/standRig.js';

const minutes = Number(process.argv[2] ?? 10);
const times = Number(process.argv[3] ?? 10);
const TICK_MILLISECONDS = 100;
const LOOK_MILLISECONDS = 15_000;
/** growth from the first quarter's end to the last quarter that is allowed: share, and bytes */
const ALLOWED = { share: 0.1, heap: 6e6, rss: 30e6, lag: 150 };

const here = (name) => new URL(name, import.meta.url).pathname;
const folder = mkdtempSync(join(tmpdir(), 'foreshift-soak-'));
const server = fork(
  here('../../dist/server/commands/main.js'),
  ['watch', '--no-browser', '--port', '0', '--data', folder],
  { execArgv: ['--expose-gc', '--import', here('./heapProbe.mjs')], stdio: ['ignore', 'pipe', 'inherit', 'ipc'] },
);
process.on('exit', () => {
  server.kill('SIGKILL');
  rmSync(folder, { recursive: true, force: true });
});
for (const signal of ['SIGINT', 'SIGTERM']) process.on(signal, () => process.exit(1));
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

process.stdout.write('fitting the demo models …\n');
const { models, watches } = await prepareDemo(folder);
for (const { json } of models) await post('/api/models', json);
// channel time runs `times` as fast as the clock and ends at the present
const startedAt = Date.now() / 1000 - 60 * minutes * times;
const source = createDemoSource('soak', startedAt);
const producer = createProducer({ to: `ws://127.0.0.1:${port}/ingest`, run: 'soak', channels: source.channels });
const began = performance.now();
const channelNow = () => startedAt + ((performance.now() - began) / 1000) * times;

let samples = 0;
/** when the frame that ends at a channel's time was sent */
const sent = new Map();
const sending = setInterval(() => {
  for (const { channel, times: at, values } of source.due(channelNow())) {
    if (at.length === 0) continue;
    producer.send(channel, { t: at, values });
    samples += at.length;
    sent.set(`${channel} ${at[at.length - 1]}`, performance.now());
  }
}, TICK_MILLISECONDS);

let lags = [];
let warnings = 0;
const listener = new WebSocket(`ws://127.0.0.1:${port}/feed`, 'foreshift.feed.1');
listener.on('open', () => listener.send(JSON.stringify({ look: { seconds: 600, columns: 1200 } })));
listener.on('message', (data) => {
  const message = decode(data);
  if (message.kind === 'warning' && message.warning.outcome === 'open') warnings++;
  if (message.kind !== 'signal') return;
  const key = `${message.channel} ${message.newest}`;
  const at = sent.get(key);
  if (at === undefined) return;
  lags.push(performance.now() - at);
  // frames before it were drawn with it
  for (const [old, when] of sent) if (when <= at && old.startsWith(message.channel)) sent.delete(old);
});

await new Promise((resolve) => setTimeout(resolve, 2000));
for (const watch of watches) await post('/api/watches', JSON.stringify(watch));

const places = [process.env.FORESHIFT_CHROMIUM, '/usr/bin/chromium', '/usr/bin/chromium-browser', '/usr/bin/google-chrome'];
const executablePath = places.find((place) => place && existsSync(place));
if (executablePath === undefined) {
  process.stderr.write('soak: no Chromium was found; install it or set FORESHIFT_CHROMIUM to its path\n');
  process.exit(1);
}
const browser = await chromium.launch({
  executablePath,
  args: ['--headless', '--no-sandbox', '--disable-gpu', '--disable-quic', '--no-first-run', '--disable-background-networking', '--disable-component-update', '--disable-sync'],
});
const page = await browser.newPage();
const complaints = [];
page.on('pageerror', (error) => complaints.push(error.message));
await page.goto(`${base}/`);
const devtools = await page.context().newCDPSession(page);
const pageHeap = async () => {
  await devtools.send('HeapProfiler.collectGarbage');
  return (await devtools.send('Runtime.getHeapUsage')).usedSize;
};
const serverMemory = () =>
  new Promise((resolve) => {
    server.once('message', resolve);
    server.send('memory?');
  });

const median = (values) => [...values].sort((a, b) => a - b)[values.length >> 1] ?? Number.NaN;
const rows = [];
const line = (row) =>
  [
    (row.seconds / 60).toFixed(1).padStart(6),
    (row.heap / 1e6).toFixed(1).padStart(9),
    (row.rss / 1e6).toFixed(1).padStart(9),
    (row.page / 1e6).toFixed(1).padStart(9),
    row.lag.toFixed(0).padStart(8),
    row.lag99.toFixed(0).padStart(8),
    String(row.waiting).padStart(8),
    (row.database / 1e6).toFixed(1).padStart(9),
  ].join('');
process.stdout.write('   min  heap MB    RSS MB  page MB  lag ms  99 % ms waiting database MB\n');
while (performance.now() - began < 60_000 * minutes) {
  await new Promise((resolve) => setTimeout(resolve, LOOK_MILLISECONDS));
  const { heapUsed, arrayBuffers, rss } = await serverMemory();
  const sorted = [...lags].sort((a, b) => a - b);
  lags = [];
  rows.push({
    seconds: (performance.now() - began) / 1000,
    heap: heapUsed + arrayBuffers,
    rss,
    page: await pageHeap(),
    lag: median(sorted),
    lag99: sorted[Math.floor(0.99 * sorted.length)] ?? Number.NaN,
    waiting: producer.waiting(),
    database: ['', '-wal'].reduce((sum, end) => sum + (statSync(join(folder, `foreshift.db${end}`), { throwIfNoEntry: false })?.size ?? 0), 0),
  });
  process.stdout.write(`${line(rows.at(-1))}\n`);
}
clearInterval(sending);
await producer.idle();
await browser.close();
listener.terminate();

// the first quarter is for warming up: buffers, compiled code, strips filling
const quarter = Math.max(1, rows.length >> 2);
const early = rows.slice(quarter, 2 * quarter);
const late = rows.slice(-quarter);
const grown = (key) => median(late.map((row) => row[key])) - median(early.map((row) => row[key]));
const limits = {
  heap: Math.max(ALLOWED.heap, ALLOWED.share * median(early.map(({ heap }) => heap))),
  rss: Math.max(ALLOWED.rss, ALLOWED.share * median(early.map(({ rss }) => rss))),
  page: Math.max(ALLOWED.heap, ALLOWED.share * median(early.map(({ page }) => page))),
  lag: ALLOWED.lag,
};
const growth = Object.fromEntries(Object.keys(limits).map((key) => [key, grown(key)]));
const stored = (await (await fetch(`${base}/api/channels`)).json()).reduce((sum, channel) => sum + channel.samples, 0);
const tooMuch = Object.keys(limits).filter((key) => !(growth[key] <= limits[key]));
process.stdout.write(
  `${JSON.stringify({ minutes, times, samples, stored, warnings, growth, limits, pageErrors: complaints })}\n` +
    (tooMuch.length === 0 ? 'heap, memory, page and lag stayed as they were\n' : `grew too much: ${tooMuch.join(', ')}\n`),
);
server.kill('SIGTERM');
await new Promise((resolve) => server.once('close', resolve));
process.exit(tooMuch.length > 0 || stored !== samples || complaints.length > 0 ? 1 : 0);
