import { describe, expect, it } from 'vitest';
import { baselineFamilies } from '../../../server/rehearsal/baselines.ts';
import type { GriddedRecording } from '../../../server/rehearsal/gridded.ts';
import { placesOf } from '../../../server/rehearsal/trace.ts';
import { createRandom } from '../../../server/signal/random.ts';

const INTERVAL = 0.5;
const COUNT = 600;

/** Two runs with a gap of 50 steps between them, and switches told a little after they happened. */
function recording(values: Float64Array): GriddedRecording {
  const run = (firstStep: number, from: number, to: number) => ({
    start: 100 + firstStep * INTERVAL,
    firstStep,
    values: [values.subarray(from, to)],
    newest: Float64Array.from({ length: to - from }, (_, i) => 100 + (firstStep + i) * INTERVAL),
  });
  const switches = [130, 180, 260, 330].map((at) => ({ at, confirmedAt: at + 2, from: 0, to: 1 }));
  const end = 100 + (COUNT + 49) * INTERVAL;
  return {
    interval: INTERVAL,
    start: 100,
    end,
    known: end,
    runs: [run(0, 0, 250), run(300, 250, COUNT)],
    switches,
    unseen: [],
  };
}

const { gaussian } = createRandom('baselines');
const values = Float64Array.from({ length: COUNT }, gaussian);
const families = baselineFamilies({
  interval: INTERVAL,
  scale: 8,
  horizon: 12,
  room: 6,
  between: 80,
  mean: 0.5,
  most: 60,
});
const signals = families.flat();
const traceOn = (name: string, one: GriddedRecording) =>
  signals.find((signal) => signal.name === name)!.trace(one, placesOf(one)).value;

describe('the baselines', () => {
  it('are those of the contract, in both directions where that means anything', () => {
    const both = (name: string) => [`${name} rising`, `${name} falling`];
    expect([...new Set(signals.map(({ name }) => name))]).toEqual([
      ...both('distance from the mean'),
      ...both('rate of change'),
      ...both('running variance'),
      ...both('lag-1 autocorrelation'),
      'time since the last switch',
      'a clock',
    ]);
  });

  it('know nothing of what comes after, nor of switches that are not confirmed yet', () => {
    const cut = 200;
    const whole = recording(values);
    const changed = recording(values.map((value, i) => (i < cut ? value : 3 * value + 1)));
    changed.switches = changed.switches.filter(({ confirmedAt }) => confirmedAt <= 100 + cut * INTERVAL);
    for (const { name, trace } of signals) {
      const [a, b] = [trace(whole, placesOf(whole)).value, trace(changed, placesOf(changed)).value];
      expect([name, a.subarray(0, cut)]).toEqual([name, b.subarray(0, cut)]);
    }
  });

  it('do not reach across a gap: what needs a window is not known again until it is full', () => {
    const one = recording(values);
    for (const name of [
      'rate of change rising',
      'running variance rising',
      'lag-1 autocorrelation falling',
    ]) {
      const value = traceOn(name, one);
      expect([name, value[249], value[275], value[300]]).toEqual([name, expect.any(Number), NaN, NaN]);
      expect(value[249]).not.toBeNaN();
    }
  });

  it('are what they are called', () => {
    const one = recording(values);
    expect(traceOn('distance from the mean rising', one)[10]).toBe(Math.abs(values[10]! - 0.5));
    expect(traceOn('rate of change falling', one)[10]).toBeCloseTo((values[10]! - values[8]!) / 1, 12);
    const since = traceOn('time since the last switch', one);
    // 130 s is told at 132 s, step 64
    expect([since[63], since[64], since[100]]).toEqual([NaN, 2, 20]);
    const clock = traceOn('a clock', one);
    const calls = [...clock.keys()].filter((i) => clock[i] === 1 && i < 250);
    // the shortest period is the room of a span: six steps
    expect(new Set(calls.slice(1).map((step, i) => step - calls[i]!))).toEqual(new Set([6]));
  });
});
