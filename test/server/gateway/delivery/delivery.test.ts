import { writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { describe, expect, it } from 'vitest';
import { openReceivers } from '../../../../server/gateway/delivery/receivers.ts';
import { modelToJson } from '../../../../server/model/modelFile.ts';
import type { Delivery, Receiver } from '../../../../shared-types/delivery.ts';
import { Settings } from '../../../../shared-types/settings.ts';
import type { LogEntry, Warning } from '../../../../shared-types/warning.ts';
import type { WatchState } from '../../../../shared-types/watch.ts';
import { temporaryFolder } from '../../store/temporaryFolder.ts';
import { api, connect, serve, swing, swingModel, until } from '../harness.ts';
import { type Came, receiver } from './receiver.ts';

/** Frames of a tenth of a second of the swing; its first warning comes with frame 21 and speaks for `horizon` seconds. */
const WARNING_FRAME = 21;

async function watched(
  receivers: Partial<Receiver>[],
  { folder = temporaryFolder(), horizon = 20, environment = {} as NodeJS.ProcessEnv } = {},
) {
  const settings = Settings.parse({ receivers });
  const now = () => Date.now() / 1000;
  const server = await serve(
    folder,
    {},
    { receivers: await openReceivers(settings.receivers, folder, { ...process.env, ...environment }, now) },
  );
  const { port } = server;
  const model = swingModel();
  model.rule!.horizon = horizon;
  await fetch(`http://127.0.0.1:${port}/api/models`, { method: 'POST', body: modelToJson(model) });
  if ((await api(port, '/api/watches')).json.length === 0)
    await api<WatchState>(port, '/api/watches', { model: 'swing', channels: ['c'], name: 'Swing' });
  const line = await connect(port);
  line.say({ hello: 1, run: 'r', channels: [{ channel: 'c', interval: 0.1 }] });
  await line.heard((reply) => 'window' in reply);
  return {
    ...server,
    /** frames `from` up to `to`, one sample each */
    async send(from: number, to: number) {
      for (let seq = from; seq < to; seq++)
        line.say({ channel: 'c', seq, t0: seq / 10, dt: 0.1, values: [...swing(seq, 1)] });
      await line.heard((reply) => 'ack' in reply && reply.ack >= to - 1);
    },
    /** all of them in one frame: what a producer sends after its line was broken */
    async sendAtOnce(from: number, to: number, seq: number) {
      line.say({ channel: 'c', seq, t0: from / 10, dt: 0.1, values: [...swing(from, to - from)] });
      await line.heard((reply) => 'ack' in reply && reply.ack >= seq);
    },
    deliveries: async () => (await api<Delivery[]>(port, '/api/deliveries')).json,
    warnings: async () => (await api<Warning[]>(port, '/api/warnings')).json,
    log: async () => (await api<LogEntry[]>(port, '/api/log')).json,
  };
}

const eventIn = ({ body }: Came) => JSON.parse(body) as Record<string, unknown> & { data: Warning };

describe('a warning', () => {
  it('is posted to its receiver within a blink, and the outbox says so', async () => {
    const { url, came } = await receiver();
    const { send, deliveries, warnings } = await watched([{ name: 'lamp', url }]);
    await send(0, WARNING_FRAME + 1);
    await until(async () => (await deliveries())[0]?.state === 'delivered');
    expect(came).toHaveLength(1);
    const event = eventIn(came[0]!);
    const [warning] = await warnings();
    expect(event).toMatchObject({
      specversion: '1.0',
      type: 'foreshift.warning.issued',
      subject: 'swing',
      data: { id: warning!.id, at: warning!.at, from: warning!.from, to: warning!.to, name: 'Swing' },
    });
    expect(await deliveries()).toMatchObject([
      { receiver: 'lamp', kind: 'issued', event: event.id, warning: 1, attempts: 1, text: 'answered 204' },
    ]);
    // the receiver's having it counts as delivered: no page is open
    expect(warning!.deliveredAt! - warning!.madeAt).toBeLessThan(1);
  });

  it('reaches the others while one receiver is down, one ponders for ever and one fails; ingest waits for none', async () => {
    const good = await receiver();
    const pondering = await receiver(() => {});
    const failing = await receiver((response) => response.writeHead(500).end());
    const down = await receiver();
    await down.close();
    const { send, deliveries } = await watched([
      { name: 'down', url: down.url },
      { name: 'pondering', url: pondering.url },
      { name: 'failing', url: failing.url },
      { name: 'good', url: good.url },
    ]);
    await send(0, WARNING_FRAME);
    const began = performance.now();
    await send(WARNING_FRAME, WARNING_FRAME + 1);
    expect(performance.now() - began).toBeLessThan(1000);
    await until(() => good.came.length === 1);
    expect(good.came[0]!.at - began).toBeLessThan(1000);
    // while all this waits, a hundred more frames go through
    await send(WARNING_FRAME + 1, 120);
    expect(performance.now() - began).toBeLessThan(4000);
    await until(() => failing.came.length >= 2);
    const states = Object.fromEntries((await deliveries()).map(({ receiver, state }) => [receiver, state]));
    expect(states).toEqual({ down: 'pending', pondering: 'pending', failing: 'pending', good: 'delivered' });
  });

  it('is sent again after a 500, under the same id and byte for byte', async () => {
    const { url, came } = await receiver((response, _, count) =>
      response.writeHead(count === 1 ? 500 : 200).end(),
    );
    const { send, deliveries } = await watched([{ name: 'lamp', url }]);
    await send(0, WARNING_FRAME + 1);
    await until(async () => (await deliveries())[0]?.state === 'delivered');
    expect(came.map(({ body }) => body)).toEqual([came[0]!.body, came[0]!.body]);
    expect(await deliveries()).toMatchObject([{ attempts: 2, text: 'answered 200' }]);
  });

  it('reaches a receiver that comes up in time', async () => {
    const gone = await receiver();
    await gone.close();
    const { send, deliveries } = await watched([{ name: 'lamp', url: gone.url }]);
    await send(0, WARNING_FRAME + 1);
    await new Promise((resolve) => setTimeout(resolve, 400));
    const back = await receiver(undefined, gone.port);
    await until(async () => (await deliveries())[0]?.state === 'delivered');
    expect(back.came).toHaveLength(1);
  });

  it('is given up when its span is over, with a line in the log', async () => {
    const { url } = await receiver((response) => response.writeHead(500).end());
    const { send, deliveries, log } = await watched([{ name: 'lamp', url }], { horizon: 1.5 });
    await send(0, WARNING_FRAME + 1);
    await until(async () => (await deliveries())[0]?.state === 'given up');
    const [delivery] = await deliveries();
    expect(delivery!.settledAt! - delivery!.madeAt).toBeGreaterThan(1.3);
    expect(delivery!.settledAt! - delivery!.madeAt).toBeLessThan(2.5);
    const said = (await log()).filter(({ kind }) => kind === 'delivery');
    expect(said).toMatchObject([{ watch: 'swing', channel: 'c' }]);
    expect(said[0]!.text).toMatch(/warning 1 did not reach "lamp".*span was over.*answered 500/);
  });

  it('made after its span began goes to nobody, and that is noted', async () => {
    const { url, came } = await receiver();
    const { send, sendAtOnce, deliveries, warnings } = await watched([{ name: 'lamp', url }]);
    await send(0, 5);
    await sendAtOnce(5, 40, 5);
    await until(async () => (await deliveries()).length > 0);
    expect(await warnings()).toMatchObject([{ quiet: true }]);
    expect(await deliveries()).toMatchObject([
      { state: 'withheld', attempts: 0, text: expect.stringContaining('too late to speak') },
    ]);
    expect(came).toEqual([]);
  });

  it('of a shelved watch goes to nobody, and of a watch on trial is not even noted', async () => {
    const { url, came } = await receiver();
    const { port, send, deliveries, warnings } = await watched([{ name: 'lamp', url }]);
    await api(port, '/api/watches', { model: 'swing', channels: ['c'], name: 'Trial', use: 'on trial' });
    await api(port, '/api/watches/swing/actions', { action: 'shelve', seconds: 60, reason: 'trimming' });
    await send(0, WARNING_FRAME + 1);
    await until(async () => (await warnings()).length === 2 && (await deliveries()).length > 0);
    expect(await deliveries()).toMatchObject([
      { watch: 'swing', state: 'withheld', text: 'the watch was shelved' },
    ]);
    expect(came).toEqual([]);
  });

  it('goes to those that hear of its watch, and its outcome to those that want it', async () => {
    const all = await receiver();
    const other = await receiver();
    const { send } = await watched([
      { name: 'all', url: all.url, watches: ['Swing'], outcomes: true },
      { name: 'other', url: other.url, watches: ['Another'] },
    ]);
    // within the switch at 3.1 s and what is needed to confirm it
    await send(0, 60);
    await until(() => all.came.length >= 2);
    expect(all.came.map(eventIn)).toMatchObject([
      { type: 'foreshift.warning.issued', data: { outcome: 'open' } },
      { type: 'foreshift.warning.graded', data: { outcome: 'true' } },
    ]);
    expect(other.came).toEqual([]);
  });

  it('is acted on, by name, when a receiver that acts has it', async () => {
    const { url } = await receiver();
    const { send, warnings } = await watched([{ name: 'heater trim', url, acts: true }]);
    await send(0, WARNING_FRAME + 1);
    await until(async () => (await warnings())[0]?.outcome === 'acted');
    expect((await warnings())[0]).toMatchObject({ acted: { by: 'heater trim', text: 'answered 204' } });
  });

  it('runs a program, and what that says of its failing is noted', async () => {
    const folder = temporaryFolder();
    const { send, deliveries } = await watched(
      [
        { name: 'camera', command: [process.execPath, '-e', ''] },
        { name: 'broken', command: [process.execPath, '-e', `console.error('no film'); process.exit(1)`] },
      ],
      { folder },
    );
    await send(0, WARNING_FRAME + 1);
    await until(async () => (await deliveries()).every(({ state }) => state !== 'pending'));
    expect(
      Object.fromEntries((await deliveries()).map(({ receiver, state, text }) => [receiver, [state, text]])),
    ).toEqual({
      camera: ['delivered', 'the program ended well'],
      broken: ['given up', 'the program ended with 1: no film'],
    });
  });
});

describe('after a stop', () => {
  it('what was not settled is sent on under its id, and what was is not', async () => {
    const folder = temporaryFolder();
    const lamp = await receiver();
    let answers = false;
    const bell = await receiver((response) => answers && response.writeHead(204).end());
    const receivers = [
      { name: 'lamp', url: lamp.url },
      { name: 'bell', url: bell.url },
    ];
    const first = await watched(receivers, { folder });
    await first.send(0, WARNING_FRAME + 1);
    await until(async () => lamp.came.length === 1 && bell.came.length === 1);
    await until(async () => (await first.deliveries()).some(({ state }) => state === 'delivered'));
    await first.close();
    answers = true;
    const second = await watched(receivers, { folder });
    await until(async () => (await second.deliveries()).every(({ state }) => state === 'delivered'));
    expect(bell.came.map(({ body }) => body)).toEqual([bell.came[0]!.body, bell.came[0]!.body]);
    expect(lamp.came).toHaveLength(1);
  });

  it('an open warning that never came to be in the outbox is found and sent', async () => {
    const folder = temporaryFolder();
    const first = await watched([], { folder });
    await first.send(0, WARNING_FRAME + 1);
    await first.close();
    const { url, came } = await receiver();
    const second = await watched([{ name: 'lamp', url }], { folder });
    await until(async () => (await second.deliveries())[0]?.state === 'delivered');
    expect(eventIn(came[0]!).data.at).toBeCloseTo(2.1, 9);
  });

  it('an open warning whose span is over is left alone: a new receiver hears nothing of the past', async () => {
    const folder = temporaryFolder();
    const first = await watched([], { folder, horizon: 1 });
    await first.send(0, WARNING_FRAME + 1);
    await first.close();
    await new Promise((resolve) => setTimeout(resolve, 1100));
    const { url, came } = await receiver();
    const second = await watched([{ name: 'lamp', url }], { folder, horizon: 1 });
    expect(await second.warnings()).toMatchObject([{ outcome: 'open' }]);
    await new Promise((resolve) => setTimeout(resolve, 300));
    expect(await second.deliveries()).toEqual([]);
    expect(came).toEqual([]);
  });

  it('what waits for a receiver that settings.json names no more is given up', async () => {
    const folder = temporaryFolder();
    const { url } = await receiver(() => {});
    const first = await watched([{ name: 'lamp', url }], { folder });
    await first.send(0, WARNING_FRAME + 1);
    await until(async () => (await first.deliveries()).length === 1);
    await first.close();
    const second = await watched([], { folder });
    await until(async () => (await second.deliveries())[0]?.state === 'given up');
  }, 20_000);
});

describe('a receiver', () => {
  const opened = (receiver: Partial<Receiver>, environment: NodeJS.ProcessEnv = {}, folder = '/') =>
    openReceivers(Settings.parse({ receivers: [receiver] }).receivers, folder, environment, () => 0);
  const lamp = { name: 'lamp', url: 'http://127.0.0.1:1/' };

  it('signs with the secret of a file or of the environment, without its line break', async () => {
    const folder = temporaryFolder();
    writeFileSync(join(folder, 'lamp.secret'), 'sixteen bytes at least\n');
    const { url, came } = await receiver();
    for (const secret of [{ secretFile: 'lamp.secret' }, { secretVariable: 'LAMP' }]) {
      const [one] = await opened({ ...lamp, url, ...secret }, { LAMP: 'sixteen bytes at least' }, folder);
      await one!.send('{}', new AbortController().signal);
    }
    expect(came[0]!.headers.signature).toBe(came[1]!.headers.signature);
    expect(came[0]!.headers.signature).toMatch(/^warning=:[A-Za-z0-9+/=]{44}:$/);
  });

  it.each([
    ['its file is missing', { secretFile: 'nowhere' }, {}, 'NO_SECRET'],
    ['its variable is not set', { secretVariable: 'LAMP' }, {}, 'NO_SECRET'],
    ['it is too short', { secretVariable: 'LAMP' }, { LAMP: 'short' }, 'SHORT_SECRET'],
  ])(
    'whose secret cannot be had (%s) is refused in words that do not tell it',
    async (_, secret, has, code) => {
      const refused = opened({ ...lamp, ...secret }, has, temporaryFolder());
      await expect(refused).rejects.toMatchObject({ code });
      await expect(refused).rejects.not.toThrow(/short;|"short"/);
    },
  );

  it.each([
    ['neither url nor command', { name: 'x' }],
    ['both', { name: 'x', url: 'http://a/', command: ['a'] }],
    ['another kind of address', { name: 'x', url: 'file:///etc/passwd' }],
    ['a password in its address', { name: 'x', url: 'http://me:secret@a/' }],
    ['two secrets', { ...lamp, secretFile: 'a', secretVariable: 'B' }],
    ['a secret for a command', { name: 'x', command: ['a'], secretFile: 'a' }],
    ['a key that is none', { ...lamp, secret: 'in plain sight' }],
  ])('with %s is refused', (_, receiver) => {
    expect(Settings.safeParse({ receivers: [receiver] }).success).toBe(false);
  });

  it('must have a name of its own', () => {
    expect(Settings.safeParse({ receivers: [lamp, lamp] }).success).toBe(false);
  });
});
