import { describe, expect, it } from 'vitest';
import type { Mark, StoredCondition } from '../../../../shared-types/rehearsal.ts';
import type { LogEntry, SwitchEvent, Warning } from '../../../../shared-types/warning.ts';
import type { WatchState } from '../../../../shared-types/watch.ts';
import { temporaryFolder } from '../../store/temporaryFolder.ts';
import { api, connect, type Line, serve, swing, swingModelJson, until } from '../harness.ts';

/** Asks with any method. */
async function ask(port: number, method: string, path: string, body?: unknown) {
  const response = await fetch(`http://127.0.0.1:${port}${path}`, {
    method,
    ...(body === undefined ? {} : { body: JSON.stringify(body) }),
  });
  const text = await response.text();
  return { status: response.status, json: text === '' ? null : JSON.parse(text) };
}

async function producer(port: number): Promise<Line> {
  const line = await connect(port);
  const channels = ['c', 'bath'].map((channel) => ({ channel, interval: 0.1 }));
  line.say({ hello: 1, run: 'r', channels });
  await line.heard((reply) => 'window' in reply);
  return line;
}

/** Sends frames `from` to `to`, half a second each, of channel "c". */
async function send(line: Line, from: number, to: number): Promise<void> {
  for (let seq = from; seq < to; seq++)
    line.say({ channel: 'c', seq, t0: seq / 2, dt: 0.1, values: [...swing(5 * seq, 5)] });
  await line.heard((reply) => 'ack' in reply && reply.channel === 'c' && reply.ack >= to - 1);
}

/** One value a second of channel "bath". */
async function sendBath(line: Line, seq: number, values: number[]): Promise<void> {
  line.say({ channel: 'bath', seq, t0: seq, dt: 1, values });
  await line.heard((reply) => 'ack' in reply && reply.channel === 'bath' && reply.ack >= seq);
}

async function watched(folder = temporaryFolder()) {
  const { port, close, hub } = await serve(folder);
  const line = await producer(port);
  await hub.watches.addModel(swingModelJson());
  const { watch } = await hub.watches.add({ model: 'swing', channels: ['c'], reaction: 0 });
  return {
    port,
    close,
    hub,
    folder,
    line,
    state: async () =>
      (await api<WatchState[]>(port, '/api/watches')).json.find((each) => each.watch === watch)!,
    warnings: async () => (await api<Warning[]>(port, '/api/warnings')).json.map(({ at }) => at),
    switches: async () => (await api<SwitchEvent[]>(port, '/api/switches')).json.map(({ at }) => at),
    log: async () =>
      (await api<LogEntry[]>(port, '/api/log')).json.filter(({ kind }) => kind === 'mark' || kind === 'gap'),
  };
}

// the swing warns at 2.1 s and every 12.57 s after; it changes sides at 3.14 s and every 6.28 s after
describe('a mark', () => {
  it('with an open end blinds the watch from its beginning until it is ended, and the log says so', async () => {
    const { port, line, state, warnings, log } = await watched();
    await send(line, 0, 4);
    const made = await api<Mark>(port, '/api/marks', {
      channel: 'c',
      from: 2,
      to: null,
      why: 'calibration',
      by: 'A. Person',
    });
    expect(made).toMatchObject({ status: 201, json: { id: 1, text: '', to: null } });
    await send(line, 4, 20);
    expect(await state()).toMatchObject({ leftOut: 'calibration', regimeNow: 0 });
    expect(await warnings()).toEqual([]);
    const ended = await api<Mark>(port, '/api/marks/1/end', {});
    expect(ended.json.to).toBeCloseTo(9.9, 9);
    expect((await api(port, '/api/marks/1/end', {})).status).toBe(409);
    await send(line, 20, 40);
    expect(await state()).toMatchObject({ leftOut: null, sight: { kind: 'seeing' } });
    await until(async () => (await warnings()).length > 0);
    expect((await warnings()).map((at) => at.toFixed(1))).toEqual(['10.2', '14.7']);
    const texts = (await log()).map(({ text, by }) => [text, by]);
    expect(texts).toEqual([
      ['left out from 2 s on: calibration', 'A. Person'],
      [expect.stringMatching(/^counts again after 9\.9\d* s \(calibration\)$/), null],
      ['left out (calibration) for 8.1 s; blind until the window is full again', null],
    ]);
  });

  it('made afterwards changes nothing that a watch has said, and holds over a restart', async () => {
    const first = await watched();
    await send(first.line, 0, 8);
    await until(async () => (await first.warnings()).length === 1);
    await ask(first.port, 'POST', '/api/marks', {
      channel: 'c',
      from: 0,
      to: 3,
      why: 'other',
      text: 'door open',
    });
    expect(await first.warnings()).toHaveLength(1);
    await first.close();
    const { port } = await serve(first.folder);
    expect((await api<Mark[]>(port, '/api/marks')).json).toMatchObject([{ id: 1, text: 'door open', to: 3 }]);
    expect((await ask(port, 'DELETE', '/api/marks/1')).status).toBe(204);
    expect((await ask(port, 'DELETE', '/api/marks/1')).status).toBe(404);
    expect((await api(port, '/api/marks')).json).toEqual([]);
  });

  it('is refused in a sentence where it makes no sense', async () => {
    const { port, line } = await watched();
    await send(line, 0, 1);
    const mark = { channel: 'c', from: 5, to: 4, why: 'touched' };
    expect(await api(port, '/api/marks', mark)).toMatchObject({ status: 400, json: { code: 'BAD_RANGE' } });
    expect(await api(port, '/api/marks', { ...mark, channel: 'x' })).toMatchObject({ status: 404 });
    expect(await api(port, '/api/marks', { ...mark, why: 'because' })).toMatchObject({
      status: 400,
      json: { code: 'BAD_REQUEST' },
    });
    expect((await ask(port, 'DELETE', '/api/marks/x')).status).toBe(404);
  });
});

describe('a condition on another channel', () => {
  const condition = { channel: 'c', when: 'bath', side: 'above', level: 30 };

  it('decides for each sample by the other channel: the watch waits for it, and says so once it is silent', async () => {
    const { port, line, state, warnings } = await watched();
    await sendBath(line, 0, [20]);
    const made = await api<StoredCondition>(port, '/api/conditions', condition);
    expect(made).toEqual({ status: 201, json: { ...condition, id: 1 } });
    await send(line, 0, 6);
    expect(await warnings()).toEqual([]);
    await until(async () => (await state()).waitsFor === 'bath');
    await sendBath(line, 1, [20]);
    await sendBath(line, 2, [20]);
    expect((await state()).at).toBeCloseTo(2, 9);
    await sendBath(line, 3, [20]);
    await until(async () => (await warnings()).length === 1);
    expect(await state()).toMatchObject({ waitsFor: null, leftOut: null });
  });

  it('leaves out what lies beyond its level, and lets go of what waits when it is taken back', async () => {
    const { port, line, state, warnings, switches } = await watched();
    await sendBath(line, 0, [20]);
    await api(port, '/api/conditions', condition);
    await sendBath(line, 1, [31]);
    await send(line, 0, 12);
    for (let second = 2; second < 5; second++) await sendBath(line, second, [31]);
    await until(async () => (await state()).leftOut === 'bath above 30');
    expect([await warnings(), await switches()]).toEqual([[], []]);
    expect((await ask(port, 'DELETE', '/api/conditions', condition)).status).toBe(204);
    expect((await ask(port, 'DELETE', '/api/conditions', condition)).status).toBe(404);
    await until(async () => ((await state()).at ?? 0) > 5.8);
    expect(await state()).toMatchObject({ waitsFor: null, leftOut: null });
    await send(line, 12, 40);
    await until(async () => (await warnings()).length === 2);
    // three samples after the last that was left out, and where the swing rises again
    expect((await warnings()).map((at) => at.toFixed(1))).toEqual(['4.3', '14.7']);
  });

  it('is known over a restart, samples that waited included', async () => {
    const first = await watched();
    await sendBath(first.line, 0, [20]);
    await api(first.port, '/api/conditions', condition);
    await send(first.line, 0, 6);
    await first.close();
    const { port } = await serve(first.folder);
    const again = await producer(port);
    expect(await api(port, '/api/warnings')).toMatchObject({ json: [] });
    for (let second = 1; second < 4; second++) await sendBath(again, second, [20]);
    await until(async () => (await api<Warning[]>(port, '/api/warnings')).json.length === 1);
    const [warning] = (await api<Warning[]>(port, '/api/warnings')).json;
    expect(warning!.at).toBeCloseTo(2.1, 6);
  });
});
