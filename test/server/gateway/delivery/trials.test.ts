import { setTimeout as sleep } from 'node:timers/promises';
import { Decoder } from 'cbor-x';
import { afterEach, describe, expect, it } from 'vitest';
import { WebSocket } from 'ws';
import { createProducer, type Producer } from '../../../../server/commands/producer.ts';
import { openReceivers } from '../../../../server/gateway/delivery/receivers.ts';
import type { Delivery, MeasuredDelay, Receiver } from '../../../../shared-types/delivery.ts';
import { FEED_PROTOCOL, type FeedMessage } from '../../../../shared-types/feed.ts';
import { Settings } from '../../../../shared-types/settings.ts';
import type { LogEntry, Warning } from '../../../../shared-types/warning.ts';
import type { WatchState } from '../../../../shared-types/watch.ts';
import { temporaryFolder } from '../../store/temporaryFolder.ts';
import { api, connect, serve, swing, swingModelJson, until } from '../harness.ts';
import { receiver } from './receiver.ts';

const opened: (() => void)[] = [];
afterEach(() => {
  for (const close of opened.splice(0)) close();
});

async function watched(receivers: Partial<Receiver>[] = []) {
  const folder = temporaryFolder();
  const settings = Settings.parse({ receivers });
  const server = await serve(
    folder,
    {},
    { receivers: await openReceivers(settings.receivers, folder, process.env, () => 0) },
  );
  const { port } = server;
  await fetch(`http://127.0.0.1:${port}/api/models`, { method: 'POST', body: swingModelJson() });
  await api<WatchState>(port, '/api/watches', { model: 'swing', channels: ['c'], name: 'Swing' });
  const { watch } = (await api<WatchState[]>(port, '/api/watches')).json[0]!;
  return {
    ...server,
    measure: () => api<MeasuredDelay>(port, `/api/watches/${watch}/trials`, { by: 'A. Person' }),
    delay: async () => (await api<MeasuredDelay | null>(port, `/api/watches/${watch}/delay`)).json,
    samples: async () => (await api<{ samples: number }[]>(port, '/api/channels')).json[0]!.samples,
  };
}

/** Sends a frame of `samples` samples every tenth of a second, its newest sample `old` seconds old. */
function rig(port: number, { samples = 5, old = 0.02 } = {}): Producer {
  const producer = createProducer({
    to: `ws://127.0.0.1:${port}/ingest`,
    run: 'a run',
    channels: [{ channel: 'c', interval: 0.02 }],
  });
  let sent = 0;
  const timer = setInterval(() => {
    const newest = Date.now() / 1000 - old;
    const t = Float64Array.from({ length: samples }, (_, i) => newest - 0.02 * (samples - 1 - i));
    producer.send('c', { t, values: swing(sent, samples) });
    sent += samples;
  }, 100);
  opened.push(() => {
    clearInterval(timer);
    void producer.close();
  });
  return producer;
}

/** A page without a browser: paints and strikes after the times given, seconds. */
async function page(port: number, { painted, tone }: { painted: number | null; tone: number | null }) {
  const decoder = new Decoder({ mapsAsObjects: true, useRecords: false });
  const heard: FeedMessage[] = [];
  const socket = new WebSocket(`ws://127.0.0.1:${port}/feed`, FEED_PROTOCOL);
  opened.push(() => socket.terminate());
  socket.on('message', async (data: Buffer) => {
    const message = decoder.decode(data) as FeedMessage;
    heard.push(message);
    if (message.kind !== 'trial') return;
    const held = Math.max(painted ?? 0, tone ?? 0);
    await sleep(1000 * held);
    socket.send(JSON.stringify({ trialSeen: message.trial.id, painted, tone, held }));
  });
  await until(() => heard.some(({ kind }) => kind === 'welcome'));
  return heard;
}

describe('a trial', () => {
  it('splits the delay into rig, network, program and delivery, and leaves the rest of the least lead', async () => {
    const bench = await receiver((response) => {
      setTimeout(() => response.writeHead(204).end(), 120);
    });
    const { port, measure, delay } = await watched([{ name: 'bench', url: bench.url }]);
    rig(port, { samples: 5, old: 0.15 });
    const heard = await page(port, { painted: 0.05, tone: 0.2 });
    await until(async () => (await api(port, '/api/channels')).json[0]?.connected === true);
    await sleep(300);
    expect(await delay()).toBeNull();
    const { status, json } = await measure();
    expect(status).toBe(200);
    expect(json).toMatchObject({ watch: 'swing', by: 'A. Person', answered: true, leastLead: 0.5 });
    // five samples 0.02 s apart, the newest 0.15 s old
    expect(json.rig).toMatchObject({ how: 'measured', seconds: expect.closeTo(0.08 + 0.15, 2) });
    expect(json.network.how).toBe('estimated');
    expect(json.network.seconds!).toBeLessThan(0.05);
    expect(json.program.how).toBe('measured');
    expect(json.program.seconds!).toBeGreaterThan(0);
    expect(json.program.seconds!).toBeLessThan(0.1);
    expect(json.page.seconds!).toBeGreaterThan(0.049);
    expect(json.page.seconds!).toBeLessThan(0.15);
    expect(json.tone.seconds! - json.page.seconds!).toBeCloseTo(0.15, 6);
    expect(json.delivery.seconds).toBe(json.tone.seconds);
    expect(json.webhooks).toMatchObject([{ receiver: 'bench', how: 'measured' }]);
    expect(json.webhooks[0]!.seconds!).toBeGreaterThan(0.12);
    expect(json.webhooks[0]!.seconds!).toBeLessThan(0.6);
    const { rig: a, network: b, program: c, delivery: d } = json;
    expect(json.total).toBeCloseTo(a.seconds! + b.seconds! + c.seconds! + d.seconds!, 9);
    expect(json.left).toBeCloseTo(0.5 - json.total, 9);
    expect(await delay()).toEqual(json);
    await until(() =>
      heard.some((message) => message.kind === 'delay' && message.delay.trial === json.trial),
    );
  });

  it('is marked everywhere, warns of nothing and touches no sample', async () => {
    const bench = await receiver();
    const { port, measure } = await watched([{ name: 'bench', url: bench.url }]);
    const line = await connect(port);
    line.say({ hello: 1, run: 'r', channels: [{ channel: 'c', interval: 0.1 }] });
    await line.heard((reply) => 'window' in reply);
    line.say({ channel: 'c', seq: 0, t0: 0, dt: 0.1, values: [-5, -5, -5] });
    const measuring = measure();
    const asked = await line.heard((reply) => 'trial' in reply);
    const { trial } = asked as { trial: string };
    line.say({ channel: 'c', seq: 1, t0: 0.3, dt: 0.1, values: [-6, -7], trial, sentAt: 0.5 });
    const { json } = await measuring;
    expect(json.rig).toMatchObject({ how: 'measured', seconds: expect.closeTo(0.1 + 0.1, 9) });
    // the same frame without the mark is the same frame: nothing of it was stored otherwise
    line.say({ channel: 'c', seq: 1, t0: 0.3, dt: 0.1, values: [-6, -7] });
    line.say({ channel: 'c', seq: 2, t0: 0.5, dt: 0.1, values: [-8] });
    await line.heard((reply) => 'ack' in reply && reply.ack === 2);
    expect(line.replies.filter((reply) => 'error' in reply)).toEqual([]);
    const csv = await (await fetch(`http://127.0.0.1:${port}/api/channels/c/samples.csv?from=0&to=9`)).text();
    expect(
      csv
        .trim()
        .split('\n')
        .slice(1)
        .map((row) => Number(row.split(',')[1])),
    ).toEqual([-5, -5, -5, -6, -7, -8]);
    expect((await api<Warning[]>(port, '/api/warnings')).json).toEqual([]);
    const event = JSON.parse(bench.came[0]!.body);
    expect(event).toMatchObject({ type: 'foreshift.trial', data: { trial: true, watch: 'swing' } });
    expect((await api<Delivery[]>(port, '/api/deliveries')).json).toMatchObject([
      { receiver: 'bench', kind: 'trial', warning: 0, state: 'delivered' },
    ]);
    const said = (await api<LogEntry[]>(port, '/api/log')).json.filter(({ kind }) => kind === 'delivery');
    expect(said).toMatchObject([{ watch: 'swing', by: 'A. Person' }]);
    expect(said[0]!.text).toMatch(/^trial: /);
  });

  it('whose producer does not answer says so, and measures what frames tell', async () => {
    const { port, measure, samples } = await watched();
    const line = await connect(port);
    line.say({ hello: 1, run: 'r', channels: [{ channel: 'c', interval: 0.1 }] });
    await line.heard((reply) => 'window' in reply);
    let seq = 0;
    const timer = setInterval(() => {
      // five samples, the newest 0.3 s old by the server's clock
      const t0 = Date.now() / 1000 - 0.3 - 4 * 0.01;
      line.say({ channel: 'c', seq: seq++, t0, dt: 0.01, values: [1, 1, 1, 1, 1] });
    }, 100);
    opened.push(() => clearInterval(timer));
    await until(async () => (await api(port, '/api/channels')).json.length > 0 && (await samples()) > 0);
    const { json } = await measure();
    expect(json.answered).toBe(false);
    expect(json.rig.how).toBe('estimated');
    expect(json.rig.seconds).toBeCloseTo(0.34, 1);
    expect(json.rig.text).toContain('the producer did not answer');
    expect(json.program.how).toBe('measured');
    expect(json.page).toMatchObject({ how: 'not measured', text: 'no page is open' });
    expect(json.delivery.how).toBe('not measured');
  }, 20_000);

  it('of times that are no clock’s knows the length of a frame alone', async () => {
    const { port, measure } = await watched();
    const line = await connect(port);
    line.say({ hello: 1, run: 'r', channels: [{ channel: 'c', interval: 0.1 }] });
    await line.heard((reply) => 'window' in reply);
    line.say({ channel: 'c', seq: 0, t0: 0, dt: 0.1, values: [1, 1, 1] });
    const measuring = measure();
    const { trial } = (await line.heard((reply) => 'trial' in reply)) as { trial: string };
    line.say({ channel: 'c', seq: 1, t0: 0.3, dt: 0.1, values: [1, 1, 1], trial, sentAt: 1_796_100_000 });
    expect((await measuring).json.rig).toMatchObject({
      how: 'estimated',
      seconds: expect.closeTo(0.2, 9),
    });
  });

  it('of a channel that nothing sends to is refused, and so is one of a watch that is not there', async () => {
    const { port, measure } = await watched();
    const refused = await measure();
    expect(refused).toMatchObject({ status: 409, json: { code: 'NO_PRODUCER' } });
    expect((await api(port, '/api/watches/none/trials', {})).status).toBe(404);
    expect((await api(port, '/api/watches/none/delay')).status).toBe(404);
  });

  it('asked for twice at once is one trial', async () => {
    const { port, measure } = await watched();
    rig(port);
    await until(async () => (await api(port, '/api/channels')).json[0]?.connected === true);
    await sleep(250);
    const [one, other] = await Promise.all([measure(), measure()]);
    expect(one!.json.trial).toBe(other!.json.trial);
  });

  it('waits for no page that does not answer, and names how many did not', async () => {
    const { port, measure } = await watched();
    rig(port);
    await page(port, { painted: 0.02, tone: null });
    const dumb = new WebSocket(`ws://127.0.0.1:${port}/feed`, FEED_PROTOCOL);
    opened.push(() => dumb.terminate());
    await new Promise((resolve) => dumb.once('message', resolve));
    await sleep(250);
    const { json } = await measure();
    expect(json.page).toMatchObject({ how: 'measured', text: expect.stringContaining('1 of 2 pages') });
    expect(json.tone).toMatchObject({ how: 'not measured', text: expect.stringContaining('switched off') });
  });

  it('leaves a program alone, and a webhook that wants none', async () => {
    const bench = await receiver();
    const { port, measure } = await watched([
      { name: 'bench', url: bench.url, trials: false },
      { name: 'camera', command: [process.execPath, '-e', ''] },
    ]);
    rig(port);
    await until(async () => (await api(port, '/api/channels')).json[0]?.connected === true);
    await sleep(250);
    expect((await measure()).json.webhooks).toEqual([]);
    expect(bench.came).toEqual([]);
    expect((await api<Delivery[]>(port, '/api/deliveries')).json).toEqual([]);
  });
});
