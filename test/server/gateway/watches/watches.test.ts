import { describe, expect, it } from 'vitest';
import { modelFromJson, modelToJson } from '../../../../server/model/modelFile.ts';
import type { ModelEvidence } from '../../../../shared-types/model.ts';
import type { LogEntry, Warning } from '../../../../shared-types/warning.ts';
import type { WatchState } from '../../../../shared-types/watch.ts';
import { temporaryFolder } from '../../store/temporaryFolder.ts';
import { api, connect, type Line, serve, swing, swingModel, swingModelJson, until } from '../harness.ts';

async function producer(port: number, run = 'r'): Promise<Line> {
  const line = await connect(port);
  line.say({ hello: 1, run, channels: [{ channel: 'c', interval: 0.1 }] });
  await line.heard((reply) => 'window' in reply);
  return line;
}

/** Sends seconds `from` to `to` in frames of half a second. */
async function send(line: Line, from: number, to: number): Promise<void> {
  for (let seq = 2 * from; seq < 2 * to; seq++)
    line.say({ channel: 'c', seq, t0: seq / 2, dt: 0.1, values: [...swing(5 * seq, 5)] });
  await line.heard((reply) => 'ack' in reply && reply.ack >= 2 * to - 1);
}

/**
 * -2 cos(t/2) rises through -1 at 2 arccos(1/2) = 2.094 s and 4π later, through 0 at π and through 1.5 at 4.84 s,
 * falls below -1.5 at 11.12 s: with ten samples a second the first warning comes at 2.1 s, its switch at 3.1 s.
 */
const FIRST_WARNING_SECONDS = 3;
const SWITCHED_SECONDS = 10;

async function watched(folder = temporaryFolder()) {
  const { port, close, hub } = await serve(folder);
  const model = await fetch(`http://127.0.0.1:${port}/api/models`, {
    method: 'POST',
    body: swingModelJson(),
  });
  expect(await model.json()).toEqual({ name: 'swing' });
  const made = await api<WatchState>(port, '/api/watches', { model: 'swing', channels: ['c'], reaction: 0 });
  expect(made.status).toBe(201);
  const { watch } = made.json;
  return {
    port,
    close,
    hub,
    folder,
    watch,
    line: await producer(port),
    state: async () =>
      (await api<WatchState[]>(port, '/api/watches')).json.find((each) => each.watch === watch)!,
    act: (body: object) => api<WatchState>(port, `/api/watches/${watch}/actions`, body),
    warnings: async () => (await api<Warning[]>(port, '/api/warnings')).json,
  };
}

describe('a watch on a channel', () => {
  it('has a model whose evidence can be asked for, with who uses it', async () => {
    const { port, watch } = await watched();
    const { json } = await api<ModelEvidence>(port, '/api/models/swing/evidence');
    expect(json).toMatchObject({ name: 'swing', usedBy: [watch], rule: { variable: 'level' } });
    expect(json.spectrum[0]).toBeGreaterThan(json.noiseFloor);
    expect((await api(port, '/api/models/none/evidence')).status).toBe(404);
  });

  it('is blind, then sees, warns, and is normal again when its warning is acknowledged and over', async () => {
    const { line, state, act, warnings, watch } = await watched();
    expect(await state()).toMatchObject({ watch, sight: { kind: 'blind' }, state: 'normal', trigger: false });
    await send(line, 0, FIRST_WARNING_SECONDS);
    expect(await state()).toMatchObject({ sight: { kind: 'seeing' }, state: 'unacknowledged' });
    const [warning] = await warnings();
    expect(warning).toMatchObject({ watch, model: 'swing', channels: ['c'], outcome: 'open', quiet: false });
    expect(warning!.at).toBeCloseTo(2.1, 6);
    expect([warning!.from - warning!.at, warning!.to - warning!.at]).toEqual([
      expect.closeTo(0.5, 9),
      expect.closeTo(3, 9),
    ]);
    expect((await act({ action: 'acknowledge', upTo: warning!.id, by: 'A. Person' })).json.state).toBe(
      'acknowledged',
    );
    expect(await warnings()).toMatchObject([{ acknowledgedBy: 'A. Person' }]);
    await send(line, FIRST_WARNING_SECONDS, SWITCHED_SECONDS);
    expect(await state()).toMatchObject({ state: 'normal', regimeNow: 1 });
    expect(await warnings()).toMatchObject([{ outcome: 'true', acknowledgedBy: 'A. Person' }]);
    // the grade is made anew once a second
    await until(async () => (await state()).grade!.warnings.true === 1);
  });

  it('returns to normal unacknowledged when nobody looked', async () => {
    const { line, state, act } = await watched();
    await send(line, 0, SWITCHED_SECONDS);
    expect((await state()).state).toBe('returned to normal, unacknowledged');
    expect((await act({ action: 'acknowledge' })).json.state).toBe('normal');
  });

  it('can be shelved and taken out of service, with reasons in the log; it warns on, asking nobody', async () => {
    const { line, port, state, act, warnings } = await watched();
    await act({ action: 'shelve', seconds: 600, reason: 'calibrating', by: 'A. Person' });
    await send(line, 0, SWITCHED_SECONDS);
    expect(await state()).toMatchObject({ state: 'shelved', reason: 'calibrating' });
    expect(await warnings()).toHaveLength(1);
    expect((await act({ action: 'unshelve' })).json.state).toBe('normal');
    await act({ action: 'take out of service', reason: 'new sensor' });
    expect(await state()).toMatchObject({ state: 'out of service', reason: 'new sensor' });
    expect((await act({ action: 'return to service' })).json.state).toBe('normal');
    const kinds = (await api<LogEntry[]>(port, '/api/log')).json.map(({ kind }) => kind);
    expect(kinds.filter((kind) => /shelved|service/.test(kind))).toEqual([
      'shelved',
      'unshelved',
      'out of service',
      'in service',
    ]);
  });

  it('that leaves a person no time to react never asks for one', async () => {
    const { port, line, state, warnings, watch } = await watched();
    const trigger = await api<WatchState>(port, '/api/watches', {
      model: 'swing',
      channels: ['c'],
      name: 'trigger',
    });
    expect(trigger.json).toMatchObject({ watch: 'trigger', trigger: true });
    await send(line, 0, FIRST_WARNING_SECONDS);
    const states = (await api<WatchState[]>(port, '/api/watches')).json;
    expect(states.map((each) => each.state)).toEqual([(await state()).state, 'normal']);
    expect((await warnings()).map((each) => each.watch).sort()).toEqual([watch, 'trigger'].sort());
  });

  it('goes on after a restart with its state, its grade and no second warning', async () => {
    const first = await watched();
    await send(first.line, 0, FIRST_WARNING_SECONDS);
    await first.act({ action: 'acknowledge', by: 'A. Person' });
    const before = await first.warnings();
    await first.close();
    const { port } = await serve(first.folder);
    const again = await producer(port);
    expect(again.replies[0]).toEqual({ resume: 2 * FIRST_WARNING_SECONDS, channel: 'c' });
    expect((await api<WatchState[]>(port, '/api/watches')).json).toMatchObject([
      { watch: first.watch, state: 'acknowledged', sight: { kind: 'seeing' } },
    ]);
    await send(again, FIRST_WARNING_SECONDS, 18);
    const after = (await api<Warning[]>(port, '/api/warnings')).json;
    expect(after).toHaveLength(2);
    expect(after[0]).toMatchObject({
      ...before[0],
      outcome: 'true',
      switchAt: expect.any(Number),
      lead: expect.any(Number),
    });
  });

  it('stays quiet about what a backfill brings after its span began', async () => {
    const { line, warnings, state } = await watched();
    await send(line, 0, 1);
    await new Promise((resolve) => setTimeout(resolve, 300));
    line.say({ channel: 'c', seq: 2, t0: 1, dt: 0.1, values: [...swing(10, 90)] });
    await until(async () => (await warnings()).length === 1);
    expect(await warnings()).toMatchObject([{ quiet: true }]);
    expect((await state()).state).toBe('normal');
  });

  it('taken out of use sees nothing, and begins anew when used again', async () => {
    const { port, line, watch, state, warnings } = await watched();
    await send(line, 0, 2);
    await api(port, `/api/watches/${watch}/use`, { use: 'taken out of use' });
    await send(line, 2, 14);
    expect(await warnings()).toEqual([]);
    await api(port, `/api/watches/${watch}/use`, { use: 'in use' });
    expect((await state()).sight.kind).toBe('blind');
    await send(line, 14, 18);
    expect(await warnings()).toHaveLength(1);
  });
});

describe('models', () => {
  it('of the same name and other content are kept beside each other', async () => {
    const { hub } = await serve(temporaryFolder());
    expect(await hub.watches.addModel(swingModelJson())).toBe('swing');
    expect(await hub.watches.addModel(swingModelJson())).toBe('swing');
    const other = { ...swingModel(), rule: { ...swingModel().rule!, threshold: -0.5 } };
    expect(await hub.watches.addModel(modelToJson(other))).toBe('swing (2)');
    expect(modelFromJson(hub.watches.modelJson('swing (2)')!).rule!.threshold).toBe(-0.5);
    expect(hub.watches.models()).toMatchObject([{ name: 'swing', usedBy: [] }, { name: 'swing (2)' }]);
  });
});
