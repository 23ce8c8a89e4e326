import { describe, expect, it } from 'vitest';
import { chooseSettings } from '../../../server/rehearsal/chooseSettings.ts';
import { type RehearsalOptions, rehearse } from '../../../server/rehearsal/rehearse.ts';
import { createRandom } from '../../../server/rigs/random.ts';
import { createStand, STAND_LOOPS } from '../../../server/rigs/stand.ts';
import type { Happening, WatchSettings } from '../../../server/watch/types.ts';
import { createWatch } from '../../../server/watch/watch.ts';
import { RehearsalRequest } from '../../../shared-types/rehearsal.ts';

/** An hour and a half of loop A, with three long gaps and a restart of the clock's phase after each. */
function brokenHour(seed: string) {
  const [frame] = createStand(seed, STAND_LOOPS.slice(0, 1)).advance(5400);
  const kept = [...frame!.times.keys()].filter((i) => {
    const time = frame!.times[i]!;
    return !(time > 600 && time < 640) && !(time > 2900 && time < 2931.3) && !(time > 4000 && time < 4003);
  });
  const pick = (values: Float64Array) => Float64Array.from(kept, (i) => values[i]!);
  return { channel: 'Loop A', times: pick(frame!.times), values: pick(frame!.values) };
}

const series = brokenHour('rehearsed');
const model = chooseSettings({
  request: RehearsalRequest.parse({
    recordings: ['rehearsed'],
    channels: ['Loop A'],
    regime: 'sides:-0.3,0.3',
    leastLead: 10,
    horizon: 20,
    variable: 'forcing',
    windows: [8, 10.4],
    ranks: [2, 3],
    seed: 5,
  }),
  recordings: [{ name: 'rehearsed', sha256: '', series: [series], leftOut: [] }],
  program: 'foreshift test',
  at: '2026-01-01T00:00:00Z',
  interval: 0.4,
});
const settings: WatchSettings = {
  model,
  channels: ['Loop A'],
  rule: model.rule,
  regime: model.regime,
  regimeChannel: model.regimeChannel,
};
const run = (changes: Partial<RehearsalOptions> = {}) =>
  rehearse(settings, [[series]], { tunePart: 0.5, delay: 0, uniform: createRandom(5).uniform, ...changes });

describe('a rehearsal', () => {
  it('gives, by the live watch, exactly the score that the search found by its own short way', () => {
    expect(run().score).toEqual(model.score);
    expect(model.score!.switches.total).toBeGreaterThan(50);
    expect(model.score!.skill).toBeGreaterThan(0.3);
  });

  it('gives the same whatever the size of the frames', () => {
    const whole = run({ frame: 1_000_000 });
    for (const frame of [1, 7, 1000]) expect(run({ frame })).toEqual(whole);
  });

  it('gives every outcome that the live watch tells', () => {
    const { warnings, switches } = run();
    const happenings: Happening[] = [];
    createWatch(settings).push({ t0: 0, dt: 0, ...series }, happenings);
    const told = happenings.filter((happening) => happening.kind === 'graded');
    const outcomes = new Map(warnings.map(({ at, outcome }) => [at, outcome]));
    for (const { at, outcome } of told) expect([at, outcomes.get(at)]).toEqual([at, outcome]);
    expect(told.length).toBeGreaterThan(warnings.length - 3);
    const live = happenings.filter((happening) => happening.kind === 'switch');
    const rehearsed = new Map(switches.map(({ at, outcome }) => [at, outcome]));
    for (const { at, outcome } of live) expect([at, rehearsed.get(at)]).toEqual([at, outcome]);
    expect(live.length).toBe(switches.length);
    expect(switches.some(({ outcome }) => outcome === 'blind')).toBe(true);
  });

  it('parts what is for choosing from what is judged, whose first horizon is not scored', () => {
    const { warnings, score, judgedFrom } = run();
    expect(judgedFrom[0]).toBeCloseTo(2700, -1);
    for (const { at, part } of warnings) {
      if (Math.abs(at - judgedFrom[0]!) > 0.4) expect(part).toBe(at < judgedFrom[0]! ? 'tuning' : 'judged');
    }
    const scored = warnings.filter(({ at }) => at >= judgedFrom[0]! + 20 - 0.2);
    expect(score.warnings.total).toBe(scored.length);
    expect(run({ tunePart: 0 }).score.warnings.total).toBe(warnings.length);
  });

  it('meets every recording with a watch that knows nothing of the one before', () => {
    const options = { tunePart: 0, delay: 0, uniform: null };
    const other = brokenHour('another');
    const together = rehearse(settings, [[series], [other]], options);
    const apart = [[series], [other]].map((one) => rehearse(settings, [one], options));
    expect(together.warnings.map(({ at }) => at)).toEqual(
      apart.flatMap(({ warnings }) => warnings.map(({ at }) => at)),
    );
    expect(together.score.switches.warned).toBe(
      apart.reduce((sum, { score }) => sum + score.switches.warned, 0),
    );
  });

  it('takes whole recordings for parts when there are four or more', () => {
    const four = ['a', 'b', 'c', 'd'].map((seed) => [brokenHour(seed)]);
    const { warnings } = rehearse(settings, four, { tunePart: 0.5, delay: 0, uniform: null });
    for (const { recording, part } of warnings) expect(part).toBe(recording < 2 ? 'tuning' : 'judged');
  });

  it('says what is missing when there is no rule or no such channel', () => {
    const options = { tunePart: 0.5, delay: 0, uniform: null };
    expect(() => rehearse({ ...settings, rule: null }, [[series]], options)).toThrow(
      /no watch rule.*--threshold/,
    );
    expect(() => rehearse({ ...settings, channels: ['Loop Z'] }, [[series]], options)).toThrow(
      /no channel Loop Z, it has Loop A/,
    );
  });
});
