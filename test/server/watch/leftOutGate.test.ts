import { describe, expect, it } from 'vitest';
import { conditionStretches, leaveOut } from '../../../server/signal/leaveOut.ts';
import { createRandom } from '../../../server/signal/random.ts';
import { createLeftOutGate, type GateCondition, MOST_WAITING } from '../../../server/watch/leftOutGate.ts';
import type { Frame } from '../../../server/watch/types.ts';

const { NEGATIVE_INFINITY, POSITIVE_INFINITY } = Number;
const hot: GateCondition = { when: 'bath', side: 'above', level: 30 };
const none = () => null;
const frame = (channel: string, t0: number, values: number[]): Frame => ({
  channel,
  t0,
  dt: 1,
  times: null,
  values: Float64Array.from(values),
});
const samples = (frames: Frame[]) =>
  frames.flatMap(({ channel, times, t0, dt, values }) =>
    [...values].map((value, i) => [channel, times === null ? t0 + i * dt : times[i]!, value]),
  );

describe('the gate before a watch', () => {
  it('passes frames on untouched when nothing is to be left out', () => {
    const gate = createLeftOutGate(['c']);
    const given = frame('c', 0, [1, 2]);
    expect(gate.take(given)[0]).toBe(given);
    expect(gate.take(frame('other', 0, [1]))).toEqual([]);
  });

  it('takes the values out of what is marked, and tells why', () => {
    const gate = createLeftOutGate(['c']);
    gate.setMarks([{ from: 1, to: POSITIVE_INFINITY, why: 'calibration' }]);
    expect(samples(gate.take(frame('c', 0, [5, 6, 7])))).toEqual([
      ['c', 0, 5],
      ['c', 1, Number.NaN],
      ['c', 2, Number.NaN],
    ]);
    expect([gate.why(0.5, 0.9), gate.why(0, 1)]).toEqual([null, 'calibration']);
    gate.setMarks([{ from: 1, to: 3, why: 'calibration' }]);
    expect(samples(gate.take(frame('c', 3, [8, 9])))).toEqual([
      ['c', 3, Number.NaN],
      ['c', 4, 9],
    ]);
  });

  it('holds samples back until the channel of the condition has come as far', () => {
    const gate = createLeftOutGate(['c']);
    gate.setConditions([hot], none);
    expect(gate.take(frame('c', 0, [1, 2, 3]))).toEqual([]);
    expect([gate.waiting('c'), gate.waitsFor()]).toEqual([3, 'bath']);
    expect(samples(gate.take(frame('bath', -1, [20, 20, 31])))).toEqual([
      ['c', 0, 1],
      ['c', 1, Number.NaN],
    ]);
    expect([gate.waiting('c'), gate.why(1, 1)]).toEqual([1, 'bath above 30']);
    expect(samples(gate.take(frame('bath', 2, [30])))).toEqual([['c', 2, 3]]);
    expect([gate.waiting('c'), gate.waitsFor()]).toEqual([0, null]);
  });

  it('lets the waiting samples go when the condition is taken back', () => {
    const gate = createLeftOutGate(['c']);
    gate.setConditions([hot], none);
    gate.take(frame('c', 0, [1, 2]));
    expect(samples(gate.setConditions([], none))).toEqual([
      ['c', 0, 1],
      ['c', 1, 2],
    ]);
  });

  it('begins a new condition with the newest sample of its channel', () => {
    const gate = createLeftOutGate(['c']);
    gate.setConditions([hot], () => ({ time: 1, value: 40 }));
    expect(samples(gate.take(frame('c', 0, [1, 2, 3])))).toEqual([
      ['c', 0, Number.NaN],
      ['c', 1, Number.NaN],
    ]);
  });

  it('lets no more than a million samples wait: the oldest go on without values', () => {
    const gate = createLeftOutGate(['c']);
    gate.setConditions([hot], none);
    const big = { ...frame('c', 0, []), values: new Float64Array(MOST_WAITING) };
    expect(gate.take(big)).toEqual([]);
    const [out] = gate.take(frame('c', MOST_WAITING, [1]));
    expect([out!.values.length, out!.values.every(Number.isNaN), gate.waiting('c')]).toEqual([
      MOST_WAITING,
      true,
      1,
    ]);
  });

  it('gives what the recorded stretches give, in frames of any size and order and over a restart', () => {
    const { uniform } = createRandom('gate');
    const whole = (count: number, step: number) => ({
      times: Float64Array.from({ length: count }, (_, i) => i * step + 0.01 * uniform()),
      values: Float64Array.from({ length: count }, () => (uniform() < 0.1 ? Number.NaN : 60 * uniform())),
    });
    for (let round = 0; round < 60; round++) {
      const [c, bath] = [whole(60, 0.5), whole(25, 1.3)];
      const expected = leaveOut(c.times, c.values, conditionStretches(bath.times, bath.values, hot));
      const end = bath.times.at(-1)!;
      let gate = createLeftOutGate(['c']);
      gate.setConditions([hot], none);
      const got: number[] = [];
      const sent = { c: 0, bath: 0 };
      const all = { c, bath };
      while (sent.c < 60 || sent.bath < 25) {
        const channel = uniform() < 0.5 ? 'c' : 'bath';
        const from = sent[channel];
        const to = Math.min(all[channel].times.length, from + 1 + Math.floor(9 * uniform()));
        if (to === from) continue;
        sent[channel] = to;
        const { times, values } = all[channel];
        const part = {
          channel,
          t0: 0,
          dt: 0,
          times: times.subarray(from, to),
          values: values.subarray(from, to),
        };
        for (const out of gate.take(part)) got.push(...out.values);
        if (uniform() > 0.2) continue;
        // a restart: what waits is read again from where it is stored
        sent.c -= gate.waiting('c');
        gate = createLeftOutGate(['c'], structuredClone(gate.state()));
        gate.setConditions([hot], none);
      }
      const reached = c.times.filter((time) => time <= end).length;
      expect(got, `round ${round}`).toEqual([...expected.subarray(0, reached)]);
      expect(expected.subarray(reached).every(Number.isNaN)).toBe(true);
    }
  });

  it('knows nothing before the first sample of a condition: that is left out', () => {
    const gate = createLeftOutGate(['c']);
    gate.setConditions([hot], none);
    gate.take(frame('c', 0, [1, 2]));
    expect(samples(gate.take(frame('bath', 1, [5])))).toEqual([
      ['c', 0, Number.NaN],
      ['c', 1, 2],
    ]);
    expect(gate.why(NEGATIVE_INFINITY, 0.5)).toBe('bath above 30');
  });
});
