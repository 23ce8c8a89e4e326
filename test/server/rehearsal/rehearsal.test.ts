import { describe, expect, it } from 'vitest';
import { modelFromJson } from '../../../server/model/modelFile.ts';
import { runRehearsal } from '../../../server/rehearsal/rehearsal.ts';
import { rehearse } from '../../../server/rehearsal/rehearse.ts';
import type { RehearsalTask } from '../../../server/rehearsal/task.ts';
import { createStand, STAND_LOOPS } from '../../../server/rigs/stand.ts';
import { createRandom } from '../../../server/signal/random.ts';
import { RehearsalRequest, SWITCH_OUTCOMES, WARNING_OUTCOMES } from '../../../shared-types/rehearsal.ts';

/** An hour and a half of loop A, or what is asked for, with two long gaps. */
function loop(seed: string, seconds = 5400) {
  const [frame] = createStand(seed, STAND_LOOPS.slice(0, 1)).advance(seconds);
  const kept = [...frame!.times.keys()].filter((i) => {
    const time = frame!.times[i]!;
    return !(time > 600 && time < 640) && !(time > 4000 && time < 4003);
  });
  const pick = (values: Float64Array) => Float64Array.from(kept, (i) => values[i]!);
  return { channel: 'Loop A', unit: 'K', times: pick(frame!.times), values: pick(frame!.values) };
}

type Wanted = Partial<Parameters<typeof RehearsalRequest.parse>[0] & object>;

function taskOf(series: RehearsalTask['recordings'][number]['series'][], wanted: Wanted = {}): RehearsalTask {
  const names = series.map((_, i) => `run ${i + 1}`);
  return {
    request: RehearsalRequest.parse({
      recordings: names,
      channels: ['Loop A'],
      regime: 'sides:-0.3,0.3',
      leastLead: 10,
      horizon: 20,
      ...wanted,
    }),
    recordings: names.map((name, i) => ({ name, sha256: name, series: series[i]!, leftOut: [] })),
    program: 'foreshift test',
    at: '2026-01-01T00:00:00Z',
  };
}

const series = loop('rehearsed');
const task = taskOf([[series]]);
const told: [number, string][] = [];
const result = runRehearsal(task, (done, doing) => told.push([done, doing]));

/** What the live watch says with the rule of a row. */
function live({ request, recordings }: RehearsalTask, found: typeof result, row: number) {
  const model = modelFromJson(found.model);
  const { threshold, rearm } = found.table.rows[row]!;
  return rehearse(
    {
      model,
      channels: request.channels,
      rule: { ...model.rule!, threshold, rearm },
      regime: model.regime,
      regimeChannel: model.regimeChannel,
    },
    recordings.map((one) => one.series),
    { tunePart: request.tunePart, delay: request.delay, uniform: createRandom(request.seed).uniform },
  );
}

describe('a rehearsal with a search', () => {
  it('finds a watch with skill, and says what it did in a sentence', () => {
    expect(result.score.skill).toBeGreaterThan(0.3);
    expect(result.score.pValue).toBeLessThan(0.01);
    expect(result.sentence).toMatch(
      /^(Forcing|The level) (above|below) .* warned \d+ of \d+ reversals, .*\.$/,
    );
    expect(result.tried).toBeGreaterThan(2000);
    expect(result.pairs.length).toBeGreaterThan(20);
    expect(result.seconds).toBe(0);
  });

  it.each([0, 0.25, 0.5, 1])(
    'agrees with the live watch in every row of its table (%d of the way)',
    (way) => {
      const row = Math.round(way * (result.table.rows.length - 1));
      const { score, at, outcome, switches, leads } = result.table.rows[row]!;
      const heard = live(task, result, row);
      expect([...at]).toEqual(heard.warnings.map((one) => one.at));
      expect([...outcome].map((index) => WARNING_OUTCOMES[index])).toEqual(
        heard.warnings.map((one) => one.outcome),
      );
      expect([...switches].map((index) => SWITCH_OUTCOMES[index])).toEqual(
        heard.switches.map((one) => one.outcome),
      );
      expect({ ...score, pValue: null }).toEqual({ ...heard.score, pValue: null });
      expect(leads).toHaveLength(score.switches.warned);
    },
  );

  it('gives the chosen row the score and the p-value of the live watch', () => {
    const { score } = result.table.rows[result.chosenRow]!;
    expect(score).toEqual(live(task, result, result.chosenRow).score);
    expect(score).toEqual(result.score);
    const others = result.table.rows.filter((_, row) => row !== result.chosenRow);
    expect(others.every((row) => row.score.pValue === null)).toBe(true);
    expect(result.settings.threshold).toBe(result.table.rows[result.chosenRow]!.threshold);
  });

  it('has rows in ascending strictness, and the plain maximum of skill among them', () => {
    const sign = result.settings.direction === 'falling' ? -1 : 1;
    const thresholds = result.table.rows.map(({ threshold }) => sign * threshold);
    expect(thresholds).toEqual([...thresholds].sort((a, b) => a - b));
    expect(result.table.rows.length).toBeLessThanOrEqual(128);
    expect(result.table.rows[result.plainRow]).toBeDefined();
  });

  it('has the point at which each variable and baseline was judged on its curve, which ascends in strictness', () => {
    for (const { name, skill, detection, cameTrue, curve } of result.contenders) {
      const own = curve.filter((one) => one.skill === skill && one.detection === detection);
      expect([name, own.map((one) => one.cameTrue)]).toEqual([name, expect.arrayContaining([cameTrue])]);
      const thresholds = curve.map(({ threshold }) => threshold);
      const ascending = [...thresholds].sort((a, b) => a - b);
      expect([ascending, ascending.toReversed()]).toContainEqual(thresholds);
    }
  });

  it('lists the switches it scored, and what part they belong to', () => {
    const heard = live(task, result, 0);
    expect(result.switches.map(({ at, part }) => [at, part])).toEqual(
      heard.switches.map(({ at, part }) => [at, part]),
    );
  });

  it('carries rules, score, provenance and operating points in its model', () => {
    const model = modelFromJson(result.model);
    expect(model.score).toEqual(result.score);
    expect(model.provenance.program).toBe('foreshift test');
    const [used] = model.provenance.recordings;
    expect(used!.to).toBeLessThan(result.recordings[0]!.judgedFrom);
    expect(used!.samples).toBe(series.times.filter((time) => time <= used!.to).length);
    expect(model.operating).toHaveLength(result.table.rows.length);
  });

  it('tells how far it has come, from nothing to all, never backwards', () => {
    const shares = told.map(([done]) => done);
    expect([shares[0], shares.at(-1)]).toEqual([0, 1]);
    expect(shares).toEqual([...shares].sort((a, b) => a - b));
    expect(told.every(([, doing]) => doing.length > 3)).toBe(true);
  });

  it('gives the same for the same seed', () => {
    const again = runRehearsal(task);
    expect(again.score).toEqual(result.score);
    expect(again.verdict).toEqual(result.verdict);
  });

  it('does not look at the judged part when it chooses', () => {
    const half = series.times.length / 2;
    const judgedFrom = result.recordings[0]!.judgedFrom;
    const { gaussian } = createRandom('another half');
    const values = series.values.map((value, i) =>
      series.times[i]! < judgedFrom || i < half ? value : 0.7 * value + 0.3 * gaussian(),
    );
    const other = runRehearsal(taskOf([[{ ...series, values }]]));
    expect(other.settings).toEqual(result.settings);
    expect(other.pairs).toEqual(result.pairs);
    expect(other.score).not.toEqual(result.score);
  });
});

describe('what a rehearsal honours', () => {
  it('holds what was asked for', () => {
    const wanted = {
      variable: 'forcing',
      windows: [6, 8],
      ranks: [2],
      threshold: 1.2,
      rearm: 0.7,
      holdOff: 4,
    };
    const found = runRehearsal(taskOf([[series]], wanted));
    expect(found.settings).toMatchObject({ variable: 'forcing', threshold: 1.2, rearm: 0.7, holdOff: 4 });
    expect(found.pairs.filter(({ variable }) => variable === 'forcing').map(({ delays }) => delays)).toEqual([
      15, 20,
    ]);
  });

  it('keeps within a ceiling where the tuning part allows it, at the cost of detection', () => {
    const strict = runRehearsal(taskOf([[series]], { variable: 'forcing', ceiling: { falsePerHour: 0.5 } }));
    const lax = runRehearsal(taskOf([[series]], { variable: 'forcing', ceiling: { falsePerHour: 60 } }));
    expect([strict.weak, lax.weak]).toEqual([false, false]);
    expect(strict.score.warnings.false).toBeLessThanOrEqual(lax.score.warnings.false);
    const heard = live(taskOf([[series]]), strict, strict.chosenRow);
    const falseOnes = heard.warnings.filter(({ part, outcome }) => part === 'tuning' && outcome === 'false');
    expect(falseOnes.length).toBe(0);
  });

  it('watches a plain level when asked to, and does not compare it with itself', () => {
    const found = runRehearsal(taskOf([[series]], { variable: 'level' }));
    expect(found.settings.variable).toBe('level');
    expect(found.verdict.than).not.toBe(`level ${found.settings.direction}`);
    expect(found.table.variable).toBe(`level ${found.settings.direction}`);
    expect(live(taskOf([[series]]), found, found.chosenRow).score).toEqual(found.score);
  });

  it('takes whole recordings for parts when there are four or more', () => {
    const four = ['a', 'b', 'c', 'd'].map((seed) => [loop(seed, 2400)]);
    const found = runRehearsal(taskOf(four));
    for (const { recording, part } of found.switches) expect(part).toBe(recording < 2 ? 'tuning' : 'judged');
    expect(modelFromJson(found.model).provenance.recordings.map(({ name }) => name)).toEqual([
      'run 1',
      'run 2',
    ]);
    expect(live(taskOf(four), found, found.chosenRow).score).toEqual(found.score);
  });

  it('takes the delay off every lead', () => {
    const late = runRehearsal(taskOf([[series]], { delay: 2 }));
    expect(late.settings).toEqual(result.settings);
    expect(late.score.lead.median).toBeCloseTo(result.score.lead.median! - 2, 9);
  });

  it('leaves out what is marked: nothing is watched and no switch found there', () => {
    const marked = {
      ...task,
      recordings: [{ ...task.recordings[0]!, leftOut: [{ from: 3000, to: 3600, why: 'touched' }] }],
    };
    const found = runRehearsal(marked);
    expect(found.switches.some(({ at }) => at > 3000 && at < 3600)).toBe(false);
    expect(found.table.rows[0]!.at.some((at) => at > 3000 && at < 3600)).toBe(false);
    expect(found.leftOut).toEqual([{ recording: 0, from: 3000, to: 3600, why: 'touched' }]);
    expect(found.score.watchedSeconds).toBeLessThan(result.score.watchedSeconds - 590);
  });

  it('watches several channels in one model, and reads switches from another channel', () => {
    const [main, side] = [loop('rehearsed', 3600), loop('rehearsed', 3600)];
    const { gaussian } = createRandom('side');
    const other = { ...side, channel: 'Side', values: side.values.map((value) => -2 * value + gaussian()) };
    const wanted = { channels: ['Loop A', 'Side'], regimeChannel: 'Side', regime: 'sides:-1.5,1.5' };
    const two = taskOf([[main, other]], { ...wanted, variable: 'forcing', windows: [4, 8], ranks: [2, 3] });
    const found = runRehearsal(two);
    expect(modelFromJson(found.model).channels.map(({ channel }) => channel)).toEqual(['Loop A', 'Side']);
    expect(live(two, found, found.chosenRow).score).toEqual(found.score);
    expect(found.switches.length).toBeGreaterThan(30);
  });

  it('judges a given model without searching, never useful where it was fitted', () => {
    const model = modelFromJson(result.model);
    const given = runRehearsal({ ...task, model });
    expect(given.tried).toBe(1);
    expect(given.score).toEqual(result.score);
    expect(given.fittedOnJudged).toBe(false);
    const [used] = model.provenance.recordings;
    const everywhere = { ...model.provenance, recordings: [{ ...used!, to: 5400 }] };
    const seen = runRehearsal({ ...task, model: { ...model, provenance: everywhere } });
    expect(seen.fittedOnJudged).toBe(true);
    expect(seen.verdict.kind).not.toBe('useful');
  });
});

describe('what a rehearsal says of noise', () => {
  const times = Float64Array.from({ length: 12_000 }, (_, i) => i * 0.1);
  it.each(['white 1', 'white 2', 'red 1', 'red 2'])('does not call it useful (%s)', (name) => {
    const { gaussian } = createRandom(name);
    let level = 0;
    const memory = name.startsWith('red') ? 0.95 : 0;
    const values = times.map(() => {
      level = memory * level + Math.sqrt(1 - memory * memory) * gaussian();
      return level;
    });
    const noise = { channel: 'Loop A', unit: '', times, values };
    const found = runRehearsal(
      taskOf([[noise]], { regime: 'excursion:1.5,0.5,1', leastLead: 0.3, horizon: 1.2 }),
    );
    expect(found.verdict.kind).not.toBe('useful');
  });
});

describe('what a rehearsal refuses, in a sentence', () => {
  it.each([
    ['a rule that never fires', { regime: 'sides:-50,50' }, 'NO_SWITCH'],
    ['a rule that is none', { regime: 'sides:1' }, 'BAD_REGIME'],
    ['a least lead beyond the horizon', { leastLead: 20, horizon: 10 }, 'SPANS'],
    ['re-arm above the threshold', { threshold: 1, rearm: 2 }, 'BAD_RULE'],
    ['overlapping events', { horizon: 900, leastLead: 1 }, 'EVENTS_OVERLAP'],
    ['a missing channel', { channels: ['Loop Z'] }, 'NO_SUCH_CHANNEL'],
    ['a missing regime channel', { regimeChannel: 'Loop Z' }, 'NO_SUCH_CHANNEL'],
    ['windows longer than the recording', { windows: [4000] }, 'NO_FULL_WINDOW'],
  ])('%s', (_, wanted, code) => {
    expect(() => runRehearsal(taskOf([[series]], wanted))).toThrow(expect.objectContaining({ code }));
  });

  it('all switches in the tuning part, or none', () => {
    const quiet = (from: number, to: number) =>
      series.values.map((value, i) => {
        const time = series.times[i]!;
        return time >= from && time < to ? 5 + Math.abs(value) : value;
      });
    const run = (values: Float64Array) => () => runRehearsal(taskOf([[{ ...series, values }]]));
    expect(run(quiet(2600, 9999))).toThrow(expect.objectContaining({ code: 'NO_SWITCH_TO_JUDGE' }));
    expect(run(quiet(0, 2800))).toThrow(expect.objectContaining({ code: 'NO_SWITCH_TO_TUNE' }));
  });

  it('the only switch before or after the tuning part, in words for one', () => {
    const late = series.values.map((value, i) => (Math.abs(value) + 1) * (series.times[i]! < 4500 ? 1 : -1));
    const run = (values: Float64Array) => () => runRehearsal(taskOf([[{ ...series, values }]]));
    expect(run(late)).toThrow('no switch lies in the tuning part (the only switch comes later)');
    const early = series.values.map((value, i) => (Math.abs(value) + 1) * (series.times[i]! < 900 ? 1 : -1));
    expect(run(early)).toThrow(/^the only switch lies in the tuning part/);
  });

  it('marks that leave nothing, and a channel without a value', () => {
    const [recording] = task.recordings;
    const marked = { ...recording!, leftOut: [{ from: -1, to: 9999, why: 'calibration' }] };
    expect(() => runRehearsal({ ...task, recordings: [marked] })).toThrow(
      /^marks and conditions leave nothing of Loop A in the recording run 1 \(1 stretch left out\).*withdraw/,
    );
    const empty = { ...series, values: series.values.map(() => Number.NaN) };
    expect(() => runRehearsal(taskOf([[series], [empty]]))).toThrow(
      /^the recording run 2 has no value of Loop A in \d+ samples/,
    );
  });

  it('a recording with no full window', () => {
    const short = { ...series, times: series.times.slice(0, 2), values: series.values.slice(0, 2) };
    expect(() => runRehearsal(taskOf([[series], [short]]))).toThrow(/run 2 has no full window/);
  });
});
