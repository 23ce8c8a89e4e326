import { describe, expect, it } from 'vitest';
import { leftOutSeries } from '../../server/rehearsal/leftOut.ts';
import { rehearse } from '../../server/rehearsal/rehearse.ts';
import { createRandom } from '../../server/rigs/random.ts';
import { conditionStretches } from '../../server/signal/leaveOut.ts';
import { createLeftOutGate, type GateCondition, type GateMark } from '../../server/watch/leftOutGate.ts';
import type { Frame, Happening, WatchSettings } from '../../server/watch/types.ts';
import { createWatch } from '../../server/watch/watch.ts';
import { swing, swingModel } from '../server/gateway/harness.ts';

const SAMPLES = 4000;
const condition: GateCondition = { when: 'bath', side: 'above', level: 0.6 };
const marks: GateMark[] = [
  { from: 50, to: 61.3, why: 'calibration' },
  { from: 300.05, to: 300.2, why: 'touched' },
];

/** A swing with noise and jitter, and a bath of its own irregular times that is too warm now and then. */
function record(seed: string) {
  const { uniform } = createRandom(seed);
  const times = Float64Array.from({ length: SAMPLES }, (_, i) => 0.1 * i + 0.0005 * uniform());
  const values = swing(0, SAMPLES).map((value) => value + 0.2 * (uniform() - 0.5));
  const bathTimes: number[] = [];
  for (let time = -1; time < 0.1 * SAMPLES - 20; time += 0.3 + 2 * uniform()) bathTimes.push(time);
  let warm = 0;
  const bath = bathTimes.map(() => {
    warm = 0.9 * warm + 0.3 * uniform();
    return uniform() < 0.02 ? Number.NaN : warm / 2.5;
  });
  return {
    c: { channel: 'c', times, values },
    bath: { channel: 'bath', times: Float64Array.from(bathTimes), values: Float64Array.from(bath) },
    uniform,
  };
}

const model = swingModel();
const settings: WatchSettings = {
  model,
  channels: ['c'],
  rule: model.rule,
  regime: model.regime,
  regimeChannel: null,
};

/** Runs gate and watch over frames of any size, the channels in any order. */
function live({ c, bath, uniform }: ReturnType<typeof record>): Happening[] {
  const gate = createLeftOutGate(['c']);
  gate.setMarks(marks);
  gate.setConditions([condition], () => null);
  const watch = createWatch(settings);
  const happenings: Happening[] = [];
  const place = { c: 0, bath: 0 };
  const of = { c, bath };
  while (place.c < c.times.length || place.bath < bath.times.length) {
    const name = uniform() < 0.5 ? 'c' : 'bath';
    const { channel, times, values } = of[name];
    const to = Math.min(times.length, place[name] + Math.ceil(200 * uniform() ** 3));
    if (to === place[name]) continue;
    const frame: Frame = {
      channel,
      t0: 0,
      dt: 0,
      times: times.subarray(place[name], to),
      values: values.subarray(place[name], to),
    };
    place[name] = to;
    for (const part of gate.take(frame)) watch.push(part, happenings);
  }
  return happenings;
}

describe('what marks and a condition on another channel leave out', () => {
  it.each(['a', 'b', 'c', 'd'])(
    'gives live the warnings, outcomes and switches of the rehearsal, to the step (seed %s)',
    (seed) => {
      const recorded = record(`left out ${seed}`);
      const happenings = live(recorded);
      const { c, bath } = recorded;
      const leftOut = [...marks, ...conditionStretches(bath.times, bath.values, condition)].map((one) => ({
        ...one,
        why: '',
      }));
      const series = leftOutSeries({ name: '', sha256: '', series: [c], leftOut });
      const rehearsed = rehearse(settings, [series], { tunePart: 0, delay: 0, uniform: null });
      const warned = happenings.flatMap((one) => (one.kind === 'warning' ? [one] : []));
      expect(warned.map(({ at, value }) => [at, value])).toEqual(
        rehearsed.warnings.map(({ at, value }) => [at, value]),
      );
      const graded = happenings.flatMap((one) => (one.kind === 'graded' ? [[one.at, one.outcome]] : []));
      const settled = rehearsed.warnings.filter(({ outcome }) => outcome !== 'open');
      expect(graded.sort()).toEqual(settled.map(({ at, outcome }) => [at, outcome]).sort());
      const switched = happenings.flatMap((one) => (one.kind === 'switch' ? [[one.at, one.outcome]] : []));
      expect(switched).toEqual(
        rehearsed.switches.slice(0, switched.length).map(({ at, outcome }) => [at, outcome]),
      );
      expect([warned.length > 10, switched.length > 10]).toEqual([true, true]);
      // far fewer than without, else nothing was left out
      const whole = rehearse(settings, [[c]], { tunePart: 0, delay: 0, uniform: null });
      expect(warned.length).toBeLessThan(0.9 * whole.warnings.length);
    },
  );
});
