import { mkdtemp, rm, writeFile } from 'node:fs/promises';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, describe, expect, it, vi } from 'vitest';
import { fitDemo, trainingSeries } from '../../../server/commands/prepareDemo.ts';
import { rehearse } from '../../../server/commands/rehearse.ts';
import { modelToJson } from '../../../server/model/modelFile.ts';
import { readCsv, writeCsv } from '../../../server/recordings/csv.ts';
import type { Model } from '../../../shared-types/model.ts';

const folder = await mkdtemp(join(tmpdir(), 'foreshift-rehearse-'));
afterAll(() => rm(folder, { recursive: true, force: true }));

const series = trainingSeries('Loop B', 1);
const csv = writeCsv({ name: '', sha256: '', channels: [{ ...series, unit: 'K' }] });
const recording = join(folder, 'run.csv');
await writeFile(recording, csv);
const fitted = fitDemo(series);
const { sha256 } = readCsv(csv, recording);

async function modelFile(name: string, changes: Partial<Model> = {}): Promise<string> {
  const file = join(folder, name);
  await writeFile(file, modelToJson({ ...fitted, ...changes }));
  return file;
}
const model = await modelFile('loop-b.json');

/** Runs the command; what it wrote and its exit code. */
async function run(...argv: string[]): Promise<{ code: number; out: string; err: string }> {
  const texts = { out: '', err: '' };
  const keep = (key: 'out' | 'err') => (text: unknown) => {
    texts[key] += String(text);
    return true;
  };
  const spies = [
    vi.spyOn(process.stdout, 'write').mockImplementation(keep('out')),
    vi.spyOn(process.stderr, 'write').mockImplementation(keep('err')),
  ];
  try {
    return { code: await rehearse(argv), ...texts };
  } finally {
    for (const spy of spies) spy.mockRestore();
  }
}

describe('foreshift rehearse', () => {
  it('prints one JSON document with the score that the fit found on the same judged part', async () => {
    const { code, out, err } = await run(recording, '--model', model, '--json');
    expect([code, err]).toEqual([0, '']);
    const found = JSON.parse(out);
    const { pValue, ...score } = found.score;
    const { pValue: fromFit, ...promised } = fitted.score!;
    expect(score).toEqual(promised);
    expect([pValue < 0.01, fromFit! < 0.01]).toEqual([true, true]);
    for (const key of ['at', 'confirmedAt', 'outcome', 'part']) expect(found.switches[0]).toHaveProperty(key);
    for (const key of ['at', 'from', 'to', 'value', 'outcome', 'part'])
      expect(found.warnings[0]).toHaveProperty(key);
    expect(found.settings).toMatchObject({ delays: fitted.delays, rank: fitted.rank, ...fitted.rule });
    for (const later of ['baselines', 'verdict', 'tried']) expect(found).not.toHaveProperty(later);
  });

  it('says it in a sentence first, then lists every warning', async () => {
    const { out } = await run(recording, '--model', model);
    const lines = out.trim().split('\n');
    expect(lines[0]).toMatch(
      /^Forcing above \d\.\d\d sd warned \d+ of \d+ reversals, 95 % interval \d+ to \d+ %, median lead \d+\.\d s, \d+\.\d false warnings an hour\.$/,
    );
    const { warnings } = JSON.parse((await run(recording, '--model', model, '--json')).out);
    expect(lines.slice(lines.findIndex((line) => line.startsWith('at ')) + 1)).toHaveLength(warnings.length);
  });

  it('lets rule options replace the rule of the model, and what follows from them', async () => {
    const replaced = ['--threshold', '0.5', '--least-lead', '5', '--horizon', '12', '--regime', 'sides:-1,1'];
    const { out } = await run(recording, '--model', model, '--json', ...replaced);
    const { settings } = JSON.parse(out);
    expect(settings).toMatchObject({ threshold: 0.5, rearm: 0.4, leastLead: 5, horizon: 12, holdOff: 7 });
    expect(settings.regime).toEqual({ kind: 'sides', low: -1, high: 1 });
  });

  it('takes the delay off the leads', async () => {
    const read = async (...more: string[]) =>
      JSON.parse((await run(recording, '--model', model, '--json', ...more)).out).score.lead.median;
    expect(await read('--delay', '2')).toBeCloseTo((await read()) - 2, 9);
  });

  it('says when the model was fitted on what is judged', async () => {
    const used = { name: 'elsewhere.csv', sha256, from: 0, to: 1800, samples: 4500 };
    const provenance = { recordings: [used], program: '', fittedAt: '' };
    const file = await modelFile('used.json', { provenance });
    const said = async (...more: string[]) =>
      JSON.parse((await run(recording, '--model', file, '--json', ...more)).out).fittedOnJudged;
    expect(await said()).toBe(false);
    expect(await said('--tune-part', '0.25')).toBe(true);
    expect((await run(recording, '--model', file, '--tune-part', '0.25')).out).toMatch(
      /fitted on data judged here/,
    );
  });

  it.each([
    [['--model', model], 'no recording is named'],
    [[recording], 'no model is named'],
    [[recording, '--model', join(folder, 'none.json')], 'cannot be read'],
    [[join(folder, 'none.csv'), '--model', model], 'there is no file'],
    [[recording, '--model', model, '--channel', 'Loop Z'], 'no channel Loop Z, it has Loop B'],
    [[recording, '--model', model, '--come-true', '0.8'], 'belongs to the search for settings'],
    [[recording, '--model', model, '--variable', 'best'], 'belongs to the search for settings'],
    [[recording, '--model', model, '--horizon', '5'], 'lengthen the horizon'],
    [[recording, '--model', model, '--rearm', '99'], 're-arm'],
    [[recording, '--model', model, '--tune-part', '1'], 'expected a share from 0 to below 1'],
    [[recording, '--model', model, '--regime', 'sides:1'], 'sides:LOW,HIGH'],
    [[recording, '--model', model, '--nonsense'], 'foreshift rehearse --help'],
  ])('answers %j in a sentence and with exit code 2', async (argv, words) => {
    const { code, out, err } = await run(...argv);
    expect(err).toContain(words);
    expect(err.trim().split('\n')).toHaveLength(1);
    expect([code, out]).toEqual([2, '']);
  });

  it('asks for a rule when the model has none and the options give none', async () => {
    const bare = await modelFile('bare.json', { rule: null, regime: null });
    expect((await run(recording, '--model', bare)).err).toMatch(/neither the model nor the options/);
    const rule = [
      '--regime',
      'sides:-0.3,0.3',
      '--least-lead',
      '10',
      '--horizon',
      '20',
      '--threshold',
      '1.3',
    ];
    expect((await run(recording, '--model', bare, ...rule)).code).toBe(0);
  });

  it('shows an example in its help', async () => {
    const { code, out } = await run('--help');
    expect(code).toBe(0);
    expect(out).toMatch(/example:\n {2}foreshift rehearse/);
  });
});
