import { mkdirSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { setTimeout as sleep } from 'node:timers/promises';
import { afterEach, expect, it } from 'vitest';
import { createProducer } from '../../server/commands/producer.ts';
import { modelToJson } from '../../server/model/modelFile.ts';
import type { Delivery } from '../../shared-types/delivery.ts';
import type { Warning } from '../../shared-types/warning.ts';
import { receiver } from '../server/gateway/delivery/receiver.ts';
import { api, swing, swingModel, until } from '../server/gateway/harness.ts';
import { temporaryFolder } from '../server/store/temporaryFolder.ts';
import { type BuiltServer, builtServer } from './builtServer.ts';
import { chance, report, WHOLE } from './report.ts';

const KILLS = WHOLE ? 60 : 5;
const SEED = 20_261_202;
/** a warning speaks for so long that no start is too slow for it, seconds */
const HORIZON = 600;

let server: BuiltServer | null = null;
afterEach(async () => {
  await server?.stop('SIGKILL');
});

/** A data folder whose settings name the receivers, and the model file of the swing. */
function prepared(receivers: object[]): { folder: string; model: string } {
  const folder = temporaryFolder();
  mkdirSync(join(folder, 'data'));
  writeFileSync(join(folder, 'data', 'settings.json'), JSON.stringify({ receivers }));
  const model = swingModel();
  model.rule!.horizon = HORIZON;
  const file = join(folder, 'swing.json');
  writeFileSync(file, modelToJson(model));
  return { folder, model: file };
}

const idIn = ({ body }: { body: string }) => (JSON.parse(body) as { id: string }).id;

it('a server killed between sending and noting it sends again, under the same id', async () => {
  // the first answer never comes: what was received is not known to be
  const { url, came } = await receiver((response, _, count) => {
    if (count > 1) response.writeHead(204).end();
  });
  const { folder, model } = prepared([{ name: 'lamp', url, timeLimit: 60 }]);
  server = builtServer(folder, ['--model', model, '--channel', 'c']);
  await server.start();
  const to = `ws://127.0.0.1:${server.port}/ingest`;
  const producer = createProducer({ to, run: 'the run', channels: [{ channel: 'c', interval: 0.1 }] });
  for (let i = 0; i < 22; i++) producer.send('c', { t0: 0.1 * i, dt: 0.1, values: swing(i, 1) });
  await until(() => came.length === 1);
  // by now the outbox has it as pending
  await sleep(300);
  await server.stop('SIGKILL');
  await server.start();
  await until(() => came.length === 2);
  expect(came[1]!.body).toBe(came[0]!.body);
  const { port } = server;
  await until(async () => (await api<Delivery[]>(port, '/api/deliveries')).json[0]?.state === 'delivered');
  await server.stop('SIGKILL');
  await server.start();
  await sleep(1000);
  expect(came).toHaveLength(2);
  await producer.close();
});

it('of every warning, at least one message comes through kills at any moment, and all of one warning have one id', async () => {
  const random = chance(SEED);
  const { url, came } = await receiver((response) => {
    setTimeout(() => response.writeHead(random() < 0.3 ? 503 : 204).end(), 20 * random());
  });
  const { folder, model } = prepared([{ name: 'lamp', url }]);
  server = builtServer(folder, ['--model', model, '--channel', 'c']);
  await server.start();
  const producer = createProducer({
    to: `ws://127.0.0.1:${server.port}/ingest`,
    run: 'the run',
    channels: [{ channel: 'c', interval: 0.1 }],
  });
  // ten times the pace of the clock: a swing, and with it a warning, every 1.3 s
  let sent = 0;
  const timer = setInterval(() => {
    producer.send('c', { t0: 0.1 * sent, dt: 0.1, values: swing(sent, 1) });
    sent++;
  }, 10);
  for (let kill = 0; kill < KILLS; kill++) {
    await sleep(300 + 2500 * random());
    await server.stop('SIGKILL');
    await server.start();
  }
  await sleep(2000);
  clearInterval(timer);
  await producer.idle();
  const { port } = server;
  const pending = async () =>
    (await api<Delivery[]>(port, '/api/deliveries')).json.filter(({ state }) => state === 'pending');
  await until(async () => (await pending()).length === 0);
  const warnings = (await api<Warning[]>(port, '/api/warnings')).json.filter(({ quiet }) => !quiet);
  const ids = new Set(came.map(idIn));
  const lost = warnings.filter(({ watch, at }) => !ids.has(`${watch}/${at}/issued`)).length;
  report({
    tried: `${KILLS} kills while a receiver answers 204 or 503 (warnings)`,
    acknowledged: warnings.length,
    lost,
    twice: came.length - ids.size,
  });
  expect(warnings.length).toBeGreaterThan(KILLS);
  expect([...ids].sort()).toEqual(warnings.map(({ watch, at }) => `${watch}/${at}/issued`).sort());
  await producer.close();
}, 600_000);
