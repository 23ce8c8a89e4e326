import { expect, it } from 'vitest';
import { temporaryFolder } from '../../store/temporaryFolder.ts';
import { connect, serve, swing, swingModelJson, until } from '../harness.ts';
import { parseOpenMetrics } from '../openMetricsParser.ts';

async function scrape(port: number) {
  const response = await fetch(`http://127.0.0.1:${port}/metrics`);
  expect(response.headers.get('content-type')).toBe(
    'application/openmetrics-text; version=1.0.0; charset=utf-8',
  );
  const families = parseOpenMetrics(await response.text());
  const value = (name: string, labels: Record<string, string> = {}) => {
    const samples = families.flatMap(({ samples }) => samples).filter((sample) => sample.name === name);
    const found = samples.find((sample) => Object.entries(labels).every(([k, v]) => sample.labels[k] === v));
    return found?.value ?? null;
  };
  return { families, value };
}

it('counts what came in, what was refused, what was warned of and what was delivered', async () => {
  const server = await serve(temporaryFolder());
  const { hub, port } = server;
  const model = await hub.watches.addModel(swingModelJson());
  const { watch } = await hub.watches.add({ model, channels: ['c'], reaction: 30 });
  const before = await scrape(port);
  expect(before.value('foreshift_warnings_total', { watch })).toBeNull();
  const line = await connect(port);
  line.say({ hello: 1, run: 'r', channels: [{ channel: 'c', interval: 0.1 }] });
  await line.heard((reply) => 'window' in reply);
  for (let seq = 0; seq < 40; seq++)
    line.say({
      channel: 'c',
      seq: seq < 20 ? seq : seq + 2,
      t0: seq,
      dt: 0.1,
      values: [...swing(10 * seq, 10)],
    });
  line.say('nonsense');
  await line.heard((reply) => 'ack' in reply && reply.ack === 41);
  await line.heard((reply) => 'error' in reply);
  const { families, value } = await scrape(port);
  expect(value('foreshift_ingest_frames_total', { channel: 'c' })).toBe(40);
  expect(value('foreshift_ingest_samples_total', { channel: 'c' })).toBe(400);
  expect(value('foreshift_ingest_missing_frames_total', { channel: 'c' })).toBe(2);
  expect(value('foreshift_ingest_refused_total', { code: 'NOT_JSON' })).toBe(1);
  expect(value('foreshift_connections', { of: 'producers' })).toBe(1);
  expect(value('foreshift_store_waiting_samples')).toBe(0);
  expect(value('foreshift_trouble')).toBe(0);
  const issued = await hub.store.warnings({});
  expect(issued.length).toBeGreaterThan(1);
  expect(value('foreshift_warnings_total', { watch })).toBe(issued.length);
  const graded = families.find(({ name }) => name === 'foreshift_warnings_graded')!;
  expect(graded.samples.reduce((sum, sample) => sum + sample.value, 0)).toBe(
    issued.filter(({ outcome }) => outcome !== 'open').length,
  );
  expect(value('foreshift_switches_total', { watch })).toBe((await hub.store.switches({})).length);
  const states = families.find(({ name }) => name === 'foreshift_watch_state')!.samples;
  expect(
    states.filter((state) => state.value === 1).map(({ labels }) => labels.foreshift_watch_state),
  ).toEqual([hub.watches.state(watch).state]);
  expect(families.filter(({ type, name }) => type === 'counter' && !name.startsWith('foreshift_'))).toEqual(
    [],
  );
  expect(families.every(({ help }) => help.length > 10)).toBe(true);
});

it('counts the seconds in which a watch is blind', async () => {
  const { hub, port } = await serve(temporaryFolder());
  const model = await hub.watches.addModel(swingModelJson());
  const { watch } = await hub.watches.add({ model, channels: ['c'], reaction: 30 });
  const blind = async () => (await scrape(port)).value('foreshift_watch_blind_seconds_total', { watch });
  await until(async () => ((await blind()) ?? 0) >= 2);
});

it('tells how much waits for each receiver', async () => {
  const { hub, port } = await serve(temporaryFolder());
  hub.deliveries.waiting = () => [
    ['lamp', 3],
    ['log "b"', 0],
  ];
  const { value } = await scrape(port);
  expect(value('foreshift_outbox_waiting', { receiver: 'lamp' })).toBe(3);
  expect(value('foreshift_outbox_waiting', { receiver: 'log "b"' })).toBe(0);
});
