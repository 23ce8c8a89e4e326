import { mkdtemp, readFile, rm, writeFile } from 'node:fs/promises';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, it, vi } from 'vitest';
import { fit } from '../../../server/commands/fit.ts';
import { modelFromJson } from '../../../server/model/modelFile.ts';
import { lorenzStates } from '../../../server/rigs/lorenz.ts';
import { createRandom } from '../../../server/rigs/random.ts';
import { openStore } from '../../../server/store/openStore.ts';

let folder = '';
let recording = '';
let out = '';

beforeAll(async () => {
  folder = await mkdtemp(join(tmpdir(), 'foreshift-fit-'));
  recording = join(folder, 'run.csv');
  out = join(folder, 'model.json');
  const { gaussian } = createRandom(9);
  const states = lorenzStates({ start: [-8, 8, 27], step: 0.01, every: 2, samples: 12_000 });
  const lines = ['time,x,z'];
  for (let i = 0; i < 12_000; i++) {
    // a gap of two seconds in the middle
    if (i > 6000 && i < 6100) continue;
    lines.push(`${(0.02 * i).toFixed(2)},${states[3 * i]! + 0.08 * gaussian()},${states[3 * i + 2]!}`);
  }
  await writeFile(recording, `${lines.join('\n')}\n`);
});

afterAll(() => rm(folder, { recursive: true }));

/** Runs the command; what it wrote on standard output and standard error. */
async function run(...argv: string[]): Promise<{ code: number; output: string; errors: string }> {
  let output = '';
  let errors = '';
  const toOutput = vi.spyOn(process.stdout, 'write').mockImplementation((text) => {
    output += text;
    return true;
  });
  const toErrors = vi.spyOn(process.stderr, 'write').mockImplementation((text) => {
    errors += text;
    return true;
  });
  try {
    const code = await fit(argv);
    return { code, output, errors };
  } finally {
    toOutput.mockRestore();
    toErrors.mockRestore();
  }
}

describe('foreshift fit', () => {
  it('writes a model, with the gap of the recording in no window', async () => {
    const { code } = await run(recording, '--channel', 'x', '--delays', '12', '--rank', '4', '--out', out);
    expect(code).toBe(0);
    const model = modelFromJson(await readFile(out, 'utf8'));
    expect(model.interval).toBe(0.02);
    expect(model.diagnostics.samples).toBe(12_000 - 99);
    // two runs, none of whose windows crosses the gap
    expect(model.diagnostics.windows).toBe(12_000 - 99 - 2 * 11);
    expect(model.rule).toBeNull();
    expect(model.provenance.recordings[0]!.sha256).toMatch(/^[0-9a-f]{64}$/);
    expect(model.provenance.recordings[0]!.to).toBeCloseTo(239.98, 9);
  });

  it('chooses a threshold on the recording and keeps the score of its second half', async () => {
    const rule = ['--regime', 'sides:-0.8,0.8', '--least-lead', '0.2', '--horizon', '0.7'];
    const { code } = await run(
      recording,
      '--channel',
      'x',
      '--delays',
      '12',
      '--rank',
      '4',
      ...rule,
      '--out',
      out,
    );
    expect(code).toBe(0);
    const model = modelFromJson(await readFile(out, 'utf8'));
    expect(model.rule!.rearm).toBeCloseTo(0.8 * model.rule!.threshold, 12);
    expect(model.rule!.holdOff).toBeCloseTo(0.5, 12);
    expect(model.regime).toEqual({ kind: 'sides', low: -0.8, high: 0.8 });
    expect(model.score!.watchedSeconds).toBeGreaterThan(100);
    expect(model.score!.watchedSeconds).toBeLessThan(121);
    expect(model.score!.skill!).toBeGreaterThan(0.3);
  });

  it('keeps a threshold that is given, and fits two channels, a part and a window in seconds', async () => {
    const rule = [
      '--regime',
      'sides:-0.8,0.8',
      '--least-lead',
      '0.2',
      '--horizon',
      '0.7',
      '--threshold',
      '1.5',
    ];
    const part = ['--from', '10', '--to', '60', '--window', '0.2', '--rank', '4'];
    const { code } = await run(recording, '--channel', 'x', '--channel', 'z', ...part, ...rule, '--out', out);
    expect(code).toBe(0);
    const model = modelFromJson(await readFile(out, 'utf8'));
    expect(model.channels.map(({ channel }) => channel)).toEqual(['x', 'z']);
    expect(model.delays).toBe(10);
    expect(model.diagnostics.samples).toBe(2501);
    expect(model.rule!.threshold).toBe(1.5);
    expect(model.score).toBeNull();
  });

  it.each([
    ['a channel that is not there', ['--channel', 'y'], 'y'],
    ['no channel', [], '--channel'],
    ['both window and delays', ['--channel', 'x', '--delays', '9', '--window', '1'], '--window'],
    ['a rank above the delays', ['--channel', 'x', '--delays', '4', '--rank', '5'], 'rank 5'],
    ['half a rule', ['--channel', 'x', '--regime', 'sides:-1,1'], '--least-lead'],
    [
      'a rule that is none',
      ['--channel', 'x', '--regime', 'side', '--least-lead', '1', '--horizon', '2'],
      'side',
    ],
    ['an unknown option', ['--channel', 'x', '--chanel', 'x'], '--chanel'],
    ['a number that is none', ['--channel', 'x', '--rank', 'four'], '--rank'],
    ['a range with nothing in it', ['--channel', 'x', '--from', '5000'], '--from'],
    ['an unknown centring', ['--channel', 'x', '--center', 'median'], '--center'],
  ])('exits with 2 and one sentence for %s', async (_, argv, word) => {
    const { code, output, errors } = await run(recording, ...argv, '--out', out);
    expect(code).toBe(2);
    expect(output).toBe('');
    expect(errors.trim().split('\n').length).toBe(1);
    expect(errors).toContain(word);
  });

  it('exits with 2 for a file that is not there and a folder that is not there', async () => {
    expect((await run(join(folder, 'none.csv'), '--channel', 'x', '--out', out)).code).toBe(2);
    expect((await run(recording, '--channel', 'x', '--out', join(folder, 'none', 'm.json'))).code).toBe(2);
  });

  it('prints nothing but JSON with --json, and an example with --help', async () => {
    const { output } = await run(
      recording,
      '--channel',
      'x',
      '--delays',
      '8',
      '--rank',
      '3',
      '--json',
      '--out',
      out,
    );
    const summary = JSON.parse(output);
    expect(summary.coordinates.length).toBe(8);
    expect(summary.seconds).toBeGreaterThan(0);
    expect((await run('--help')).output).toContain('example:');
  });

  it('leaves out what is marked in a stored recording', async () => {
    const data = join(folder, 'data');
    const store = openStore(data, { commitEvery: 0.01 });
    const values = Float64Array.from({ length: 3000 }, (_, i) => Math.sin(0.05 * i) + Math.sin(0.021 * i));
    const t0 = 1.7e9;
    await store.appendFrames([
      { channel: 'A', run: 'r', seq: 0, digest: 1, t0, dt: 0.5, times: null, values },
    ]);
    const fitted = async () => {
      const how = ['--channel', 'A', '--delays', '20', '--rank', '4', '--data', data, '--out', out];
      expect(await run('stored:A', ...how)).toMatchObject({ code: 0, errors: '' });
      return modelFromJson(await readFile(out, 'utf8')).diagnostics;
    };
    expect(await fitted()).toMatchObject({ samples: 3000, windows: 2981 });
    await store.saveMark({
      id: 0,
      channel: 'A',
      from: t0 + 500,
      to: t0 + 549.5,
      why: 'calibration',
      text: '',
      by: '',
    });
    expect(await fitted()).toMatchObject({ samples: 2900, windows: 2900 - 2 * 19 });
    await store.close();
  });
});
