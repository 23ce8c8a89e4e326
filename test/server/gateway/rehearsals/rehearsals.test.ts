import { Decoder } from 'cbor-x';
import { describe, expect, it } from 'vitest';
import { trainingSeries } from '../../../../server/commands/prepareDemo.ts';
import { modelFromJson } from '../../../../server/model/modelFile.ts';
import { proposeRule } from '../../../../server/rehearsal/proposal.ts';
import { openStore } from '../../../../server/store/openStore.ts';
import type {
  RehearsalResult,
  RehearsalState,
  RulePreview,
  SwitchCard,
} from '../../../../shared-types/rehearsal.ts';
import type { LogEntry } from '../../../../shared-types/warning.ts';
import type { WatchState } from '../../../../shared-types/watch.ts';
import { temporaryFolder } from '../../store/temporaryFolder.ts';
import { api, connect, serve, until } from '../harness.ts';

const CHANNEL = 'Loop B';
const REQUEST = {
  recordings: [`stored:${CHANNEL}/1`],
  channels: [CHANNEL],
  regime: 'sides:-0.3,0.3',
  leastLead: 10,
  horizon: 20,
  ceiling: { falsePerHour: 4 },
};
/** Unix time of the first sample stored */
const START = 1.7e9;
const loop = trainingSeries(CHANNEL, 1);

/** A data folder in which the demo's loop was recorded `repeats` times in a row, with a gap of two hours between. */
async function recorded(repeats = 1): Promise<string> {
  const folder = temporaryFolder();
  const store = openStore(folder, { commitEvery: 0.01 });
  await store.saveChannel({ channel: CHANNEL, unit: 'K', label: '', interval: 0.4, low: null, high: null });
  for (let seq = 0; seq < repeats; seq++)
    await store.appendFrames([
      {
        channel: CHANNEL,
        run: 'r',
        seq,
        digest: seq,
        t0: 0,
        dt: 0,
        times: loop.times.map((time) => START + 10_800 * seq + time - loop.times[0]!),
        values: loop.values.slice(),
      },
    ]);
  await store.close();
  return folder;
}

/** Any method, any answer; a problem's code where it is one. */
async function ask(port: number, path: string, init: RequestInit = {}) {
  const response = await fetch(`http://127.0.0.1:${port}/api/${path}`, init);
  const bytes = new Uint8Array(await response.arrayBuffer());
  const text = new TextDecoder().decode(bytes);
  const type = response.headers.get('content-type') ?? '';
  return {
    status: response.status,
    type,
    text,
    bytes,
    json: type.includes('json') ? JSON.parse(text) : null,
  };
}

const stateOf = async (port: number, id: string) =>
  (await api<RehearsalState>(port, `/api/rehearsals/${id}`)).json;

async function started(port: number, changes: object = {}): Promise<string> {
  const answer = await api<RehearsalState>(port, '/api/rehearsals', { ...REQUEST, ...changes });
  expect(answer).toMatchObject({ status: 202, json: { state: 'running', sentence: null } });
  return answer.json.id;
}

async function rehearsed(port: number, changes: object = {}): Promise<RehearsalState> {
  const id = await started(port, changes);
  await until(async () => (await stateOf(port, id)).state !== 'running');
  return stateOf(port, id);
}

const resultOf = async (port: number, id: string): Promise<RehearsalResult> => {
  const { bytes, type } = await ask(port, `rehearsals/${id}/result`, {
    headers: { accept: 'application/cbor' },
  });
  expect(type).toContain('application/cbor');
  return new Decoder({ mapsAsObjects: true, useRecords: false }).decode(bytes) as RehearsalResult;
};

describe('a rehearsal of a stored recording', () => {
  it('is searched in its own thread and says what it found, as CBOR, as JSON and as a report, also after a restart', async () => {
    const folder = await recorded();
    const first = await serve(folder);
    const state = await rehearsed(first.port);
    expect(state).toMatchObject({ state: 'done', done: 1, secondsLeft: null, fault: null });
    expect(state.sentence).toMatch(/^Forcing above .* reversals/);
    const result = await resultOf(first.port, state.id);
    expect(result).toMatchObject({
      sentence: state.sentence,
      verdict: state.verdict,
      program: 'foreshift test',
    });
    expect(result.table.rows.length).toBeGreaterThan(50);
    expect(result.table.rows[0]!.leads).toBeInstanceOf(Float64Array);
    expect(result.recordings[0]).toMatchObject({ name: `stored:${CHANNEL}/1`, samples: loop.times.length });
    expect(result.recordings[0]!.sha256).toMatch(/^[0-9a-f]{64}$/);
    expect(result.seconds).toBeGreaterThan(0);
    await first.close();

    const { port } = await serve(folder);
    expect((await api<RehearsalState[]>(port, '/api/rehearsals')).json).toEqual([state]);
    const { json } = await ask(port, `rehearsals/${state.id}/result`);
    expect(json.score).toEqual(result.score);
    expect(json.table.rows[0].leads).toEqual([...result.table.rows[0]!.leads]);
    const report = await ask(port, `rehearsals/${state.id}/report.html`);
    expect(report).toMatchObject({ status: 200, type: 'text/html; charset=utf-8' });
    expect(report.text).toContain(`<data value="${result.score.detection.value}">`);
    const lines = (await api<LogEntry[]>(port, '/api/log')).json.filter(({ kind }) => kind === 'rehearsal');
    expect(lines.map(({ text }) => text)).toEqual([
      `rehearsal ${state.id}: ${state.verdict!.kind}: ${state.sentence}`,
    ]);
  });

  it('leaves out what is marked', async () => {
    const { port } = await serve(await recorded());
    await api(port, '/api/marks', {
      channel: CHANNEL,
      from: START + 100,
      to: START + 400,
      why: 'start-up',
    });
    const result = await resultOf(port, (await rehearsed(port)).id);
    expect(result.leftOut).toEqual([{ recording: 0, from: START + 100, to: START + 400, why: 'start-up' }]);
    expect(result.switches.some(({ at }) => at > START + 100 && at < START + 400)).toBe(false);
  });

  it('draws its variable, and has a card for every switch', async () => {
    const { port } = await serve(await recorded());
    const { id } = await rehearsed(port);
    const result = await resultOf(port, id);
    const drawn = await ask(port, `rehearsals/${id}/columns?columns=300`);
    const { t, low, high } = drawn.json as { t: number[]; low: (number | null)[]; high: (number | null)[] };
    expect([t.length <= 300, t.length > 100, low.length, high.length]).toEqual([
      true,
      true,
      t.length,
      t.length,
    ]);
    expect(Math.abs(t[0]! - START)).toBeLessThan(1);
    // blind until the first window is full, above the threshold where it warned
    const close = await ask(port, `rehearsals/${id}/columns?from=${START}&to=${START + 60}&columns=1000`);
    expect(
      close.json.low.slice(0, result.settings.delays - 1).every((value: unknown) => value === null),
    ).toBe(true);
    expect(close.json.low[result.settings.delays - 1]).toBeGreaterThanOrEqual(0);
    const row = result.table.rows[result.chosenRow]!;
    const warned = row.at[3]!;
    const there = await ask(
      port,
      `rehearsals/${id}/columns?from=${warned - 0.1}&to=${warned + 0.1}&columns=9`,
    );
    expect(there.json.high[0]).toBeGreaterThan(result.settings.threshold);

    const index = Array.from(row.switches).indexOf(1);
    const card = (await ask(port, `rehearsals/${id}/cards/${index}`)).json as SwitchCard;
    const at = result.switches[index]!.at;
    expect(card).toMatchObject({ channel: CHANNEL, at, outcome: 'warned', leastLead: 10, horizon: 20 });
    expect(card.lead).toBeCloseTo(at - card.warnedAt!, 9);
    expect([card.lead! > 10, card.lead! <= 20.2]).toEqual([true, true]);
    expect(Array.from(row.at)).toContain(card.warnedAt);
    const strict = (await ask(port, `rehearsals/${id}/cards/${index}?row=${result.table.rows.length - 1}`))
      .json;
    expect(strict.threshold).toBe(result.table.rows.at(-1)!.threshold);
    expect(card.catching!.threshold).toBeGreaterThanOrEqual(result.settings.threshold);
  });

  it('is put into use with any row: model, score and watch, in the place of the watch before', async () => {
    const { port } = await serve(await recorded());
    const { id } = await rehearsed(port);
    const result = await resultOf(port, id);
    const put = (row: number, more = {}) =>
      api<{ watch: string; model: string }>(port, `/api/rehearsals/${id}/watch`, { row, ...more });
    const first = await put(result.chosenRow);
    expect(first.status).toBe(201);
    expect(first.json.model).toBe(
      `${CHANNEL}, forcing above ${Number(result.settings.threshold.toPrecision(3))}`,
    );
    const second = await put(5, { name: 'by hand' });
    const watches = (await api<WatchState[]>(port, '/api/watches')).json;
    expect(watches.map(({ watch, use }) => [watch, use])).toEqual([
      [first.json.watch, 'taken out of use'],
      [second.json.watch, 'in use'],
    ]);
    const { threshold, rearm, score } = result.table.rows[5]!;
    expect(watches[1]).toMatchObject({ model: 'by hand', channels: [CHANNEL], promise: score });
    expect(watches[1]!.rule).toMatchObject({ threshold, rearm, leastLead: 10, horizon: 20 });
    const model = modelFromJson((await ask(port, 'models/by%20hand')).text);
    expect(model.provenance.recordings[0]!.name).toBe(`stored:${CHANNEL}/1`);
    expect(model.operating!.length).toBe(result.table.rows.length);
    const texts = (await api<LogEntry[]>(port, '/api/log')).json
      .filter(({ kind }) => kind === 'watch')
      .map(({ text }) => text);
    expect(texts).toContain('taken out of use: "by hand" takes over');
    expect(await put(9999)).toMatchObject({ status: 404, json: { code: 'NOT_THERE' } });
  });
});

describe('a search at work', () => {
  it('says how far it is and how long it will take, can be stopped, and shows nothing half-done', async () => {
    const { port } = await serve(await recorded(6));
    const id = await started(port, { recordings: [`stored:${CHANNEL}`], ranks: [2, 3, 4, 5, 6, 8, 10, 12] });
    const waiting = await started(port);
    await until(async () => (await stateOf(port, id)).secondsLeft !== null);
    const state = await stateOf(port, id);
    expect([state.done > 0 && state.done < 1, state.secondsLeft! > 0, state.doing.length > 3]).toEqual([
      true,
      true,
      true,
    ]);
    expect(await stateOf(port, waiting)).toMatchObject({ state: 'running', done: 0 });
    expect(await ask(port, `rehearsals/${id}/result`)).toMatchObject({
      status: 409,
      json: { code: 'NO_RESULT' },
    });
    const stopped = await api<RehearsalState>(port, `/api/rehearsals/${id}/stop`, {});
    expect(stopped.json).toMatchObject({
      state: 'stopped',
      sentence: null,
      verdict: null,
      secondsLeft: null,
    });
    expect(await ask(port, `rehearsals/${id}/report.html`)).toMatchObject({ status: 409 });
    await until(async () => (await stateOf(port, waiting)).state === 'done');
    expect((await stateOf(port, id)).state).toBe('stopped');
  });

  it('keeps acknowledgements flowing', async () => {
    const { port } = await serve(await recorded(6));
    const line = await connect(port);
    line.say({ hello: 1, run: 'r', channels: [{ channel: 'c', interval: 0.01 }] });
    await line.heard((reply) => 'window' in reply);
    const id = await started(port, { recordings: [`stored:${CHANNEL}`] });
    await until(async () => (await stateOf(port, id)).done > 0);
    const waits: number[] = [];
    let seq = 0;
    while ((await stateOf(port, id)).state === 'running' && seq < 60) {
      const sent = performance.now();
      const values = Array.from({ length: 100 }, (_, i) => Math.sin(seq + i));
      line.say({ channel: 'c', seq, t0: seq, dt: 0.01, values });
      await line.heard((reply) => 'ack' in reply && reply.ack >= seq);
      waits.push(performance.now() - sent);
      seq++;
    }
    expect(waits.length).toBeGreaterThan(10);
    waits.sort((a, b) => a - b);
    expect(waits[Math.floor(0.9 * waits.length)]!).toBeLessThan(250);
    await api(port, `/api/rehearsals/${id}/stop`, {});
  });

  it('of a recording that cannot be rehearsed fails in a sentence', async () => {
    const { port } = await serve(await recorded());
    const faults: [object, string][] = [
      [{ regime: 'sides:-90,90' }, 'never finds a switch'],
      [{ leastLead: 30 }, 'is not shorter than the horizon'],
      [{ channels: ['elsewhere'] }, 'has no channel elsewhere'],
      [{ recordings: [`stored:${CHANNEL}/9`] }, 'has 1 recordings'],
      [{ recordings: ['run.csv'] }, 'is not a stored recording'],
    ];
    for (const [changes, words] of faults) {
      const state = await rehearsed(port, changes);
      expect(state, JSON.stringify(changes)).toMatchObject({ state: 'failed', sentence: null });
      expect(state.fault).toContain(words);
    }
  });

  it('is refused where the request makes no sense, and where too many wait', async () => {
    const { port } = await serve(await recorded());
    const post = (body: unknown) => api<{ code: string }>(port, '/api/rehearsals', body);
    expect(await post({ ...REQUEST, regime: 'sideways:1' })).toMatchObject({
      status: 400,
      json: { code: 'BAD_REGIME' },
    });
    expect(await post({ ...REQUEST, horizon: -1 })).toMatchObject({
      status: 400,
      json: { code: 'BAD_REQUEST' },
    });
    expect(await post([])).toMatchObject({ status: 400 });
    for (let i = 0; i < 6; i++) await started(port);
    expect(await post(REQUEST)).toMatchObject({ status: 429, json: { code: 'TOO_MANY' } });
    expect(await ask(port, 'rehearsals/77')).toMatchObject({
      status: 404,
      json: { code: 'NO_SUCH_REHEARSAL' },
    });
  });
});

describe('what the page asks while a rule is typed', () => {
  it('shows the switches of a rule, and proposes one', async () => {
    const { port } = await serve(await recorded());
    const recording = `stored:${CHANNEL}/1`;
    const preview = (regime: string) =>
      api<RulePreview & { code: string }>(port, '/api/rehearsals/preview', {
        recording,
        channel: CHANNEL,
        regime,
      });
    const { status, json } = await preview('sides:-0.3,0.3');
    expect(status).toBe(200);
    expect(json.switches.length).toBeGreaterThan(50);
    expect(json.perHour).toBeCloseTo((json.switches.length / (loop.times.length * 0.4)) * 3600, 0);
    expect((await preview('sides:-90,90')).json.switches).toEqual([]);
    expect(await preview('sides:3')).toMatchObject({ status: 400, json: { code: 'BAD_REGIME' } });
    const proposal = await api<{ rule: string }>(port, '/api/rehearsals/proposal', {
      recording,
      channel: CHANNEL,
    });
    expect(proposal).toEqual({ status: 200, json: proposeRule(loop.times, loop.values) });
    expect(
      await api(port, '/api/rehearsals/proposal', { recording: 'stored:x', channel: 'x' }),
    ).toMatchObject({
      status: 400,
      json: { code: 'NO_RECORDING' },
    });
  });

  it('draws a stored recording', async () => {
    const { port } = await serve(await recorded(2));
    const of = (name: string) =>
      ask(port, `recordings/columns?columns=100&recording=${encodeURIComponent(name)}`);
    const second = await of(`stored:${CHANNEL}/2`);
    expect(second.json.t[0]).toBeCloseTo(START + 10_800, 3);
    expect(second.json.t.length).toBeGreaterThan(50);
    const both = await of(`stored:${CHANNEL}`);
    expect([both.json.t[0] < START + 10, both.json.low.includes(null)]).toEqual([true, true]);
    expect(await of('stored:nothing')).toMatchObject({ status: 404, json: { code: 'NO_RECORDING' } });
  });
});
