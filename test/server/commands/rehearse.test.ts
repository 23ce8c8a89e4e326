import { mkdtemp, readFile, rm, writeFile } from 'node:fs/promises';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, describe, expect, it, vi } from 'vitest';
import { fitDemo, trainingSeries } from '../../../server/commands/prepareDemo.ts';
import { rehearse } from '../../../server/commands/rehearse.ts';
import { modelFromJson, modelToJson } from '../../../server/model/modelFile.ts';
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

const SEARCH = ['--channel', 'Loop B', '--regime', 'sides:-0.3,0.3', '--least-lead', '10', '--horizon', '20'];
const BASELINES = [
  'level rising',
  'level falling',
  'distance from the mean rising',
  'distance from the mean falling',
  'rate of change rising',
  'rate of change falling',
  'running variance rising',
  'running variance falling',
  'lag-1 autocorrelation rising',
  'lag-1 autocorrelation falling',
  'time since the last switch',
  'a clock',
];

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
    expect(found.tried).toBe(1);
    expect(Object.keys(found.baselines)).toEqual(expect.arrayContaining(BASELINES));
    for (const one of Object.values(found.baselines))
      expect(Object.keys(one as object).sort()).toEqual(['cameTrue', 'detection', 'settings', 'skill']);
    expect(found.verdict.sentence.length).toBeGreaterThan(20);
  });

  it('says it in a sentence first, then lists every warning of a given watch', async () => {
    const { out } = await run(recording, '--model', model);
    const lines = out.trim().split('\n');
    expect(lines[0]).toMatch(
      /^Forcing above \d\.\d+ sd warned \d+ of \d+ reversals, 95 % interval \d+ to \d+ %, median lead [\d.]+ s, [\d.]+ false warnings an hour; .+ warned \d+ with [\d.]+ s\.$/,
    );
    expect(lines[1]).toMatch(/^(Useful|Weak|No better than|No skill|Too few events)/);
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

  it('judges all of a recording with --tune-part 0', async () => {
    const argv = [recording, '--model', model, '--tune-part', '0', '--json'];
    const found = JSON.parse((await run(...argv)).out);
    expect(found.score.warnings.total).toBe(found.warnings.length);
    expect(found.score.switches.total).toBe(found.switches.length);
    expect(found.verdict.kind).toMatch(/^(weak|useful|no better than)$/);
  });

  it('never calls a model useful that was fitted on what is judged', async () => {
    const used = { name: recording, sha256, from: 0, to: 3600, samples: 9000 };
    const file = await modelFile('seen.json', {
      provenance: { recordings: [used], program: '', fittedAt: '' },
    });
    const { verdict, fittedOnJudged } = JSON.parse((await run(recording, '--model', file, '--json')).out);
    expect(fittedOnJudged).toBe(true);
    expect(verdict.kind).not.toBe('useful');
  });

  it('says how a value with a minus sign is written', async () => {
    const { code, err } = await run(recording, '--channel', 'Loop B', '--threshold', '-1');
    expect(code).toBe(2);
    expect(err).toContain('is written with an equals sign, --threshold=-1');
  });

  it('lists the last forty warnings after a search, and says where all of them are', async () => {
    const { out } = await run(recording, ...SEARCH);
    const lines = out.trim().split('\n');
    expect(out).toMatch(/\d+ warnings, the last 40 \(--json has them all\):/);
    expect(lines.slice(lines.findIndex((line) => line.startsWith('at ')) + 1)).toHaveLength(40);
  });

  it('searches without a model: settings, score, baselines, how many were tried, a verdict', async () => {
    const { code, out, err } = await run(recording, ...SEARCH, '--json');
    expect([code, err]).toEqual([0, '']);
    const found = JSON.parse(out);
    const keys = ['switches', 'warnings', 'score', 'baselines', 'settings', 'tried', 'verdict'];
    expect(Object.keys(found)).toEqual(expect.arrayContaining(keys));
    expect(found.tried).toBeGreaterThan(1000);
    expect(Object.keys(found.baselines)).toEqual(expect.arrayContaining(BASELINES));
    const judged = found.warnings.filter(
      ({ at, part }: { at: number; part: string }) =>
        part === 'judged' && at >= found.recordings[0].judgedFrom + 20 - 0.2,
    );
    expect(judged).toHaveLength(found.score.warnings.total);
    for (const key of ['delays', 'rank', 'variable', 'threshold', 'rearm', 'onDelay', 'holdOff'])
      expect(found.settings).toHaveProperty(key);
  });

  it('names every baseline also where the level itself is what is watched, and does not compare it with itself', async () => {
    const { out } = await run(recording, ...SEARCH, '--variable', 'level', '--json');
    const { settings, baselines, verdict } = JSON.parse(out);
    expect(settings.variable).toBe('level');
    expect(Object.keys(baselines)).toEqual(expect.arrayContaining(BASELINES));
    expect(verdict.than).not.toBe(`level ${settings.direction}`);
  });

  it('writes the chosen settings as a model that says the same when it is rehearsed', async () => {
    const out = join(folder, 'chosen.json');
    const searched = await run(recording, ...SEARCH, '--json', '--out', out);
    const again = await run(recording, '--model', out, '--json');
    const [first, second] = [JSON.parse(searched.out), JSON.parse(again.out)];
    expect(second.score).toEqual(first.score);
    expect(second.warnings).toEqual(first.warnings);
    const written = modelFromJson(await readFile(out, 'utf8'));
    expect(written.score).toEqual(first.score);
    expect(written.provenance.recordings[0]).toMatchObject({ name: recording, sha256 });
    expect(written.provenance.recordings[0]!.to).toBeLessThan(1801);
    expect(second.fittedOnJudged).toBe(false);
    const { threshold } = written.rule!;
    const point = written.operating!.find((one) => one.threshold === threshold)!;
    expect(point.detection).toBe(first.score.detection.value);
    expect(point.falsePerHour).toBe(first.score.falsePerHour.value);
  });

  it.each([
    [['--model', model], 'no recording is named'],
    [[recording], 'no channel and no model is named'],
    [[recording, '--channel', 'Loop B'], 'nothing says what a switch is'],
    [[recording, '--channel', 'Loop B', '--regime', 'sides:-1,1'], '--least-lead'],
    [[recording, '--model', join(folder, 'none.json')], 'cannot be read'],
    [[join(folder, 'none.csv'), '--model', model], 'there is no file'],
    [[recording, '--model', model, '--channel', 'Loop Z'], 'no channel Loop Z, it has Loop B'],
    [[recording, ...SEARCH, '--channel', 'Loop Z'], 'no channel Loop Z, it has Loop B'],
    [[recording, '--model', model, '--come-true', '1.8'], 'a share from 0 to 1'],
    [[recording, '--model', model, '--variable', 'best'], 'belongs to the search for settings'],
    [[recording, ...SEARCH, '--variable', 'prospect'], 'not made by this version'],
    [[recording, ...SEARCH, '--variable', 'mood'], 'expected forcing, level or best'],
    [[recording, '--model', model, '--horizon', '5'], 'lengthen the horizon'],
    [[recording, ...SEARCH, '--least-lead', '30'], 'raise --horizon'],
    [[recording, '--model', model, '--rearm', '99'], 're-arm'],
    [[recording, '--model', model, '--tune-part', '1'], 'expected a share from 0 to below 1'],
    [[recording, ...SEARCH, '--tune-part', '0'], 'expected a share from 0.1 to 0.9'],
    [[recording, '--model', model, '--regime', 'sides:1'], 'sides:LOW,HIGH'],
    [[recording, ...SEARCH, '--regime', 'sides:-50,50'], 'never finds a switch'],
    [[recording, ...SEARCH, '--horizon', '900'], 'shorten the horizon'],
    [[recording, ...SEARCH, '--out', join(folder, 'no', 'such', 'folder.json')], 'cannot be written'],
    [[recording, '--model', model, '--nonsense'], 'foreshift rehearse --help'],
  ])('answers %j in a sentence and with exit code 2', async (argv, words) => {
    const { code, out, err } = await run(...argv);
    expect(err).toContain(words);
    expect(err.trim().split('\n')).toHaveLength(1);
    expect([code, out]).toEqual([2, '']);
  });

  it('says when all switches lie in the tuning part, or a recording has no full window', async () => {
    const quiet = series.values.map((value, i) => (series.times[i]! < 1500 ? value : Math.abs(value) + 1));
    const file = join(folder, 'quiet.csv');
    const channels = [{ ...series, values: quiet, unit: 'K' }];
    await writeFile(file, writeCsv({ name: '', sha256: '', channels }));
    expect((await run(file, ...SEARCH)).err).toMatch(/all \d+ switches lie in the tuning part/);
    const short = join(folder, 'short.csv');
    const few = { ...series, times: series.times.slice(0, 3), values: series.values.slice(0, 3), unit: 'K' };
    await writeFile(short, writeCsv({ name: '', sha256: '', channels: [few] }));
    const { code, err } = await run(recording, short, ...SEARCH);
    expect(err).toMatch(/short.csv has no full window/);
    expect(code).toBe(2);
  });

  it('says when a recording has no value, or one switch alone that cannot be chosen by', async () => {
    const written = async (name: string, values: Float64Array) => {
      const file = join(folder, name);
      const channels = [{ ...series, values, unit: 'K' }];
      await writeFile(file, writeCsv({ name: '', sha256: '', channels }));
      return run(file, ...SEARCH);
    };
    const once = await written(
      'once.csv',
      series.values.map((value, i) => (Math.abs(value) + 1) * (series.times[i]! < 3000 ? 1 : -1)),
    );
    const empty = await written(
      'empty.csv',
      series.values.map(() => Number.NaN),
    );
    expect(once.err).toMatch(/no switch lies in the tuning part \(the only switch comes later\)/);
    expect(empty.err).toMatch(/empty.csv has no value of Loop B/);
    expect([once.code, empty.code, once.out, empty.out]).toEqual([2, 2, '', '']);
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
