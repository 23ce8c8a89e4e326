// A stand-in for Foreshift's server, for looking at the page without one: serves dist/client and plays an invented
// feed. Run: node test/client/standInServer.mjs [--port N] [--scene busy|empty|sixteen|calm|silent|blind|shelved]
// Prints its address; ends with its process. Nothing here is measured data.
import { createServer } from 'node:http';
import { readFile } from 'node:fs/promises';
import { extname } from 'node:path';
import { fileURLToPath } from 'node:url';
import { Encoder } from 'cbor-x';
import { WebSocketServer } from 'ws';

const option = (name, otherwise) => {
  const at = process.argv.indexOf(`--${name}`);
  return at < 0 ? otherwise : process.argv[at + 1];
};
const scene = option('scene', 'busy');
const root = fileURLToPath(new URL(option('pages', '../../dist/client/'), import.meta.url));
const encoder = new Encoder({ useRecords: false, tagUint8Array: false });
const POLICY = "default-src 'none'; script-src 'self'; style-src 'self'; img-src 'self'; connect-src 'self'; base-uri 'none'";
const TYPES = { '.html': 'text/html', '.js': 'text/javascript', '.css': 'text/css', '.svg': 'image/svg+xml' };

const DT = 0.4;
const PAST = 900;
const count = scene === 'sixteen' ? 16 : scene === 'empty' ? 0 : 3;
const started = Date.now() / 1000;
let random = 7;
const next = () => {
  random = (Math.imul(random ^ (random >>> 15), 0x2c1b3c6d) + 0x9e3779b9) >>> 0;
  return ((random ^ (random >>> 13)) >>> 0) / 4294967296;
};

// ---- an invented loop: the Lorenz equations slowed to about 15 s an orbit, read through a noisy sensor
function createLoop(index) {
  return { index, s: [1 + index, 2 - 0.1 * index, 20], side: 0, t: [], v: [], f: [], switches: [], lastFar: null };
}
function step(loop, t) {
  const sub = 20;
  const h = (DT * 0.05) / sub;
  let [x, y, z] = loop.s;
  for (let i = 0; i < sub; i++) {
    const dx = 10 * (y - x);
    const dy = x * (28 - z) - y;
    const dz = x * y - (8 / 3) * z;
    x += h * dx;
    y += h * dy;
    z += h * dz;
  }
  const before = loop.s[0];
  loop.s = [x, y, z];
  const value = x / 4.2 + 0.03 * (next() - 0.5);
  const dropped = scene !== 'calm' && next() < 0.004;
  loop.t.push(t);
  loop.v.push(dropped ? NaN : value);
  const forcing = Math.max(0, (z - 24) / 6.5) * (1 + 0.2 * (next() - 0.5)) + 0.25 * next();
  loop.f.push(forcing);
  if (Math.sign(before) !== Math.sign(x) && loop.lastFar !== Math.sign(x)) {
    loop.lastFar = Math.sign(x);
    return true;
  }
  return false;
}

const fraction = (value, spread) => ({ value, low: Math.max(0, value - spread), high: Math.min(1, value + spread * 0.4) });
const none = { value: null, low: null, high: null };
const score = (warned, total, cameTrue) => ({
  switches: { total, warned, late: 12, missed: Math.max(0, total - warned - 12), blind: 0 },
  warnings: { total: Math.round(warned * 1.1), true: warned, repeat: 3, late: 4, false: 9, open: 0, unseen: 0, acted: 0 },
  detection: fraction(warned / total, 0.05),
  cameTrue: fraction(cameTrue, 0.05),
  falseRatio: none,
  falsePerHour: none,
  lead: { median: 15.6, p10: 11, p90: 19, random: 8 },
  tau: 0.2,
  skill: 0.7,
  skillShare: 0.8,
  pValue: 0.002,
  watchedSeconds: 9000,
});

const rule = { variable: 'forcing', direction: 'rising', threshold: 1.7, rearm: 1.36, onDelay: 0, holdOff: 10, leastLead: 10, horizon: 20 };
const channels = [];
const watches = [];
const warnings = [];
const loops = [];
const switches = [];
let ids = 1;
for (let i = 0; i < count; i++) {
  const unfriendly = i % 3 === 2;
  const channel = unfriendly ? `Room ${i}` : `Loop ${String.fromCharCode(65 + i)} ΔT`;
  channels.push({
    channel,
    unit: unfriendly ? '%' : 'K',
    label: unfriendly ? 'relative humidity, sensor node 2' : 'right − left thermocouple',
    interval: unfriendly ? 5 : DT,
    low: null,
    high: null,
    first: started - 11_000,
    newest: null,
    value: null,
    age: 0,
    connected: true,
    silent: false,
    clockOffset: 0.02,
    samples: 27_000,
    holes: 0,
    gaps: 0,
    saturated: 0,
    rate: unfriendly ? 0.2 : 2.5,
    refused: 0,
    refusal: null,
  });
  loops.push(createLoop(i));
  if (unfriendly) continue;
  watches.push({
    watch: `w${i}`,
    name: `Loop ${String.fromCharCode(65 + i)}`,
    model: `loop-${'abcdefghijklmnop'[i]}`,
    channels: [channel],
    use: 'in use',
    state: 'normal',
    shelvedUntil: null,
    reason: null,
    trigger: false,
    window: 8,
    delays: 20,
    rank: 5,
    interval: DT,
    rule,
    regime: { kind: 'sides', low: -0.2, high: 0.2 },
    regimeChannel: null,
    switchWord: 'reversal',
    sight: { kind: 'seeing' },
    likeness: { kind: 'like' },
    value: 0,
    at: null,
    leftOut: null,
    waitsFor: null,
    regimeNow: 0,
    promise: score(141, 154, 0.97),
    grade: score(268, 331, 0.95),
    gradeSince: started - 11_000,
    armed: true,
  });
}
if (scene === 'blind' && watches[0]) {
  watches[0].sight = { kind: 'blind', left: 3.2 };
  watches[0].likeness = { kind: 'not known' };
  watches[1].likeness = { kind: 'unlike', since: started - 95 };
}
if (scene === 'shelved' && watches[0]) {
  Object.assign(watches[0], { state: 'shelved', shelvedUntil: started + 900, reason: 'heater on the left leg being changed' });
  Object.assign(watches[1], { state: 'out of service', reason: 'thermocouple broken, spare ordered' });
}

function advance(i, t, live) {
  const loop = loops[i];
  const watch = watches.find((each) => each.channels[0] === channels[i].channel);
  if (!watch) {
    if (Math.round(t / DT) % 12 === 0) {
      loop.t.push(t);
      loop.v.push(next() < 0.25 || (t / 97) % 1 < 0.2 ? NaN : 52 + 6 * Math.sin(t / 190) + 0.4 * (next() - 0.5) + (next() < 0.02 ? 22 : 0));
    }
    return;
  }
  if (step(loop, t)) {
    const to = loop.s[0] > 0 ? 0 : 1;
    const event = { id: ids++, watch: watch.watch, channel: channels[i].channel, at: t, confirmedAt: t, from: 1 - to, to, outcome: 'warned', warning: null, lead: null };
    switches.push(event);
    watch.regimeNow = to;
    if (live) broadcast({ kind: 'switch', switch: event });
    for (const warning of warnings.filter((each) => each.watch === watch.watch && each.outcome === 'open')) {
      settle(warning, t > warning.from ? 'true' : 'late', t, live);
    }
  }
  for (const warning of warnings.filter((each) => each.watch === watch.watch && each.outcome === 'open' && t > each.to)) settle(warning, 'false', null, live);
  const f = loop.f[loop.f.length - 1];
  if (f < rule.rearm) watch.armed = true;
  const last = warnings.findLast((each) => each.watch === watch.watch);
  const shy = scene === 'calm' || scene === 'blind';
  if (watch.armed && f > rule.threshold && (!last || t - last.at > 10)) {
    watch.armed = false;
    if (shy && live) return;
    const warning = {
      id: ids++,
      watch: watch.watch,
      model: watch.model,
      channels: watch.channels,
      at: t,
      from: t + 10,
      to: t + 20,
      madeAt: t,
      deliveredAt: t,
      variable: 'forcing',
      value: f,
      threshold: rule.threshold,
      outcome: 'open',
      switchAt: null,
      lead: null,
      acknowledgedAt: live ? null : t + 3,
      acknowledgedBy: live ? null : 'night shift',
      quiet: false,
    };
    warnings.push(warning);
    if (live) {
      if (watch.state !== 'shelved' && watch.state !== 'out of service') watch.state = 'unacknowledged';
      broadcast({ kind: 'warning', warning });
      broadcast({ kind: 'watch', watch });
    }
  }
}
function settle(warning, outcome, switchAt, live) {
  warning.outcome = outcome;
  warning.switchAt = switchAt;
  warning.lead = switchAt === null ? null : switchAt - warning.at;
  if (!live) return;
  const watch = watches.find((each) => each.watch === warning.watch);
  const others = warnings.some((each) => each.watch === watch.watch && each.outcome === 'open');
  if (watch.state === 'unacknowledged' && !others) watch.state = 'returned to normal, unacknowledged';
  if (watch.state === 'acknowledged' && !others) watch.state = 'normal';
  broadcast({ kind: 'warning', warning });
  broadcast({ kind: 'watch', watch });
}

let clock = started - PAST;
for (; clock < started; clock += DT) for (let i = 0; i < count; i++) advance(i, clock, false);

const columnsOf = (t, v, from, to) => {
  const keep = [];
  for (let i = 0; i < t.length; i++) if (t[i] >= from && t[i] <= to) keep.push(i);
  const values = Float64Array.from(keep, (i) => v[i]);
  return { t: Float64Array.from(keep, (i) => t[i]), low: values, high: values };
};

const pages = new Set();
function broadcast(message) {
  const bytes = encoder.encode(message);
  for (const page of pages) page.send(bytes);
}
function wholePast(page, seconds) {
  for (let i = 0; i < count; i++) {
    const { t, v, f } = loops[i];
    const from = clock - seconds * 1.05;
    page.send(encoder.encode({ kind: 'signal', channel: channels[i].channel, columns: columnsOf(t, v, from, clock), replace: true, newest: t[t.length - 1], age: 0 }));
    const watch = watches.find((each) => each.channels[0] === channels[i].channel);
    if (watch) page.send(encoder.encode({ kind: 'trace', watch: watch.watch, columns: columnsOf(t, f, from, clock), replace: true }));
  }
}

const server = createServer(async (request, response) => {
  const url = new URL(request.url, 'http://stand.in');
  const json = (status, body) => response.writeHead(status, { 'content-type': status < 400 ? 'application/json' : 'application/problem+json' }).end(JSON.stringify(body));
  if (url.pathname === '/api/models') return json(200, []);
  const action = /^\/api\/watches\/([^/]+)\/actions$/.exec(url.pathname);
  if (action) {
    let text = '';
    for await (const part of request) text += part;
    return act(decodeURIComponent(action[1]), JSON.parse(text), json);
  }
  const columns = /^\/api\/(channels|watches)\/([^/]+)\/columns$/.exec(url.pathname);
  if (columns) {
    const name = decodeURIComponent(columns[2]);
    const i = channels.findIndex(({ channel }) => channel === name || watches.find((watch) => watch.watch === name)?.channels[0] === channel);
    const picked = columnsOf(loops[i].t, columns[1] === 'channels' ? loops[i].v : loops[i].f, Number(url.searchParams.get('from')), Number(url.searchParams.get('to')));
    const list = (values) => Array.from(values, (value) => (Number.isFinite(value) ? value : null));
    return json(200, { t: list(picked.t), low: list(picked.low), high: list(picked.high) });
  }
  const path = url.pathname === '/' ? 'index.html' : url.pathname.slice(1);
  try {
    const body = await readFile(new URL(path, `file://${root}`));
    response.writeHead(200, { 'content-type': TYPES[extname(path)] ?? 'application/octet-stream', 'content-security-policy': POLICY }).end(body);
  } catch {
    response.writeHead(404).end();
  }
});

function act(name, action, json) {
  const watch = watches.find((each) => each.watch === name);
  if (!watch) return json(404, { title: 'No such watch', detail: `There is no watch ${name}; reload the page.` });
  if (action.action === 'acknowledge') {
    const open = warnings.some((each) => each.watch === name && each.outcome === 'open');
    watch.state = open ? 'acknowledged' : 'normal';
    for (const warning of warnings.filter((each) => each.watch === name && each.acknowledgedAt === null)) {
      Object.assign(warning, { acknowledgedAt: clock, acknowledgedBy: action.by || null });
      broadcast({ kind: 'warning', warning });
    }
  } else if (action.action === 'shelve') Object.assign(watch, { state: 'shelved', shelvedUntil: clock + action.seconds, reason: action.reason });
  else if (action.action === 'take out of service') Object.assign(watch, { state: 'out of service', reason: action.reason });
  else watch.state = 'normal';
  broadcast({ kind: 'watch', watch });
  return json(200, watch);
}

const sockets = new WebSocketServer({ server, path: '/feed', handleProtocols: () => 'foreshift.feed.1' });
sockets.on('connection', (page) => {
  const welcome = {
    program: 'Foreshift 0.1.0',
    serverTime: Date.now() / 1000,
    startedAt: started,
    demo: true,
    ingestAddress: `ws://127.0.0.1:${server.address().port}/ingest`,
    trouble: null,
    channels: channels.map((channel, i) => ({ ...channel, newest: loops[i].t.at(-1) ?? null, value: loops[i].v.findLast(Number.isFinite) ?? null })),
    watches,
    warnings: warnings.slice(-200),
    switches: switches.slice(-2000),
  };
  page.send(encoder.encode({ kind: 'welcome', welcome }));
  page.on('message', (text) => {
    const { look } = JSON.parse(String(text));
    wholePast(page, look.seconds);
    pages.add(page);
  });
  page.on('close', () => pages.delete(page));
});

setInterval(() => broadcast({ kind: 'beat', serverTime: Date.now() / 1000 }), 1000);
setInterval(() => {
  const real = Date.now() / 1000;
  for (; clock < real; clock += DT) {
    for (let i = 0; i < count; i++) {
      if (scene === 'silent' && i === 0 && clock > started + 1) {
        if (!channels[0].silent) {
          Object.assign(channels[0], { silent: true, newest: loops[0].t.at(-1), value: loops[0].v.findLast(Number.isFinite), age: 2 });
          broadcast({ kind: 'channel', channel: channels[0] });
        }
        continue;
      }
      const before = loops[i].t.length;
      advance(i, clock, true);
      const { t, v, f } = loops[i];
      if (t.length === before) continue;
      const last = t[t.length - 1];
      const value = v.findLast(Number.isFinite);
      Object.assign(channels[i], { newest: last, value, age: real - last });
      broadcast({ kind: 'channel', channel: channels[i] });
      broadcast({ kind: 'signal', channel: channels[i].channel, columns: columnsOf(t.slice(before), v.slice(before), -Infinity, Infinity), replace: false, newest: last, age: 0 });
      const watch = watches.find((each) => each.channels[0] === channels[i].channel);
      if (watch) broadcast({ kind: 'trace', watch: watch.watch, columns: columnsOf(t.slice(before), f.slice(before), -Infinity, Infinity), replace: false });
    }
  }
}, 100);

server.listen(Number(option('port', '0')), '127.0.0.1', () => console.log(`http://127.0.0.1:${server.address().port}/`));
