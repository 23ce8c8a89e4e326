import { writeFile } from 'node:fs/promises';
import { join } from 'node:path';
import { expect, it } from 'vitest';
import { play } from '../../server/commands/play.ts';
import { createRandom } from '../../server/rigs/random.ts';
import type { Happening } from '../../server/watch/types.ts';
import { createWatch } from '../../server/watch/watch.ts';
import type { SwitchEvent, Warning } from '../../shared-types/warning.ts';
import { api, serve, swing, swingModel, swingModelJson } from '../server/gateway/harness.ts';
import { temporaryFolder } from '../server/store/temporaryFolder.ts';

const SAMPLES = 20_000;
/** jittered times, and a stretch without samples */
const SEED = 'live equals replay';

function recording() {
  const { uniform } = createRandom(SEED);
  const values = swing(0, SAMPLES).map((value) => value + 0.2 * (uniform() - 0.5));
  const times = values.map((_, i) => Number((0.1 * i + 0.0005 * uniform() + (i > 9000 ? 42 : 0)).toFixed(6)));
  return { times, values };
}

/** The happenings of the watch run over the recording directly, in one frame. */
function direct({ times, values }: ReturnType<typeof recording>): Happening[] {
  const model = swingModel();
  const watch = createWatch({
    model,
    channels: ['c'],
    rule: model.rule,
    regime: model.regime,
    regimeChannel: null,
  });
  const happenings: Happening[] = [];
  watch.push({ channel: 'c', t0: times[0]!, dt: 0, times, values }, happenings);
  return happenings;
}

it('warns live, over sockets and disk, of exactly what the recording gives when it is run directly', async () => {
  const { times, values } = recording();
  const folder = temporaryFolder();
  const file = join(folder, 'swing.csv');
  await writeFile(file, `time,c\n${Array.from(times, (time, i) => `${time},${values[i]}`).join('\n')}\n`);
  const server = await serve(join(folder, 'data'));
  const { watches } = server.hub;
  await watches.add({ model: await watches.addModel(swingModelJson()), channels: ['c'], reaction: 30 });

  const to = `ws://127.0.0.1:${server.port}/ingest`;
  const code = await play([file, '--to', to, '--as', 'c', '--times', 'recorded', '--pace', 'max', '--json']);
  expect(code).toBe(0);
  await server.hub.journal.idle();

  const happenings = direct({ times, values });
  const expected = happenings.filter((happening) => happening.kind === 'warning');
  expect(expected.length).toBeGreaterThan(100);
  const warnings = (await api<Warning[]>(server.port, '/api/warnings?channel=c')).json;
  expect(warnings.map(({ at, value, threshold }) => ({ at, value, threshold }))).toEqual(
    expected.map(({ at, value, threshold }) => ({ at, value, threshold })),
  );
  const graded = new Map(
    happenings.flatMap((h) => (h.kind === 'graded' ? [[h.at, h.outcome] as const] : [])),
  );
  expect(warnings.map(({ outcome }) => outcome)).toEqual(expected.map(({ at }) => graded.get(at) ?? 'open'));
  expect([...graded.values()]).toContain('true');

  const switches = (await api<SwitchEvent[]>(server.port, '/api/switches?channel=c')).json;
  const told = happenings.flatMap((h) => (h.kind === 'switch' ? [{ at: h.at, outcome: h.outcome }] : []));
  expect(switches.map(({ at, outcome }) => ({ at, outcome }))).toEqual(told);
});
