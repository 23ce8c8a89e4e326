import { describe, expect, it } from 'vitest';
import { conditionStretches, justAfter, justBefore, leaveOut } from '../../../server/signal/leaveOut.ts';
import { createRandom } from '../../../server/signal/random.ts';

const times = Float64Array.of(0, 1, 2, 3, 4, 5);
const values = Float64Array.of(10, 11, 12, 13, 14, 15);

describe('leaving stretches out', () => {
  it('puts NaN from the first to the last sample of each stretch, ends included, in a copy', () => {
    const kept = leaveOut(times, values, [
      { from: 4, to: Number.POSITIVE_INFINITY },
      { from: 1, to: 2 },
      { from: 1.5, to: 2.5 },
    ]);
    expect([...kept]).toEqual([10, Number.NaN, Number.NaN, 13, Number.NaN, Number.NaN]);
    expect([...values]).toEqual([10, 11, 12, 13, 14, 15]);
  });

  it('gives the same array back where no sample is left out', () => {
    expect(leaveOut(times, values, [])).toBe(values);
    expect(leaveOut(times, values, [{ from: 2.1, to: 2.9 }])).toBe(values);
    expect(leaveOut(times, values, [{ from: 6, to: 9 }])).toBe(values);
  });

  it('agrees with asking of every sample whether some stretch holds it', () => {
    const { uniform } = createRandom('leave out');
    for (let round = 0; round < 200; round++) {
      const stretches = Array.from({ length: 3 }, () => {
        const from = Math.round(8 * uniform()) - 1;
        return { from, to: from + Math.round(3 * uniform()) };
      });
      const slow = [...values].map((value, i) =>
        stretches.some(({ from, to }) => times[i]! >= from && times[i]! <= to) ? Number.NaN : value,
      );
      expect([...leaveOut(times, values, stretches)], JSON.stringify(stretches)).toEqual(slow);
    }
  });
});

describe('a condition on another channel', () => {
  const { NEGATIVE_INFINITY, POSITIVE_INFINITY, NaN: missing } = Number;

  it('holds from the first sample beyond the level until just before the next that is not', () => {
    expect(conditionStretches(times, Float64Array.of(1, 5, 6, 1, 1, 5), { side: 'above', level: 4 })).toEqual(
      [
        { from: NEGATIVE_INFINITY, to: justBefore(0) },
        { from: 1, to: justBefore(3) },
        { from: 5, to: POSITIVE_INFINITY },
      ],
    );
  });

  it('does not hold on the level itself, and a missing value leaves it as it was', () => {
    expect(
      conditionStretches(times, Float64Array.of(missing, 4, 3, missing, 4, 5), { side: 'below', level: 4 }),
    ).toEqual([
      { from: NEGATIVE_INFINITY, to: justBefore(1) },
      { from: 2, to: justBefore(4) },
      { from: justAfter(5), to: POSITIVE_INFINITY },
    ]);
  });

  it('of a channel without samples is never known, so everything is left out', () => {
    const none = new Float64Array();
    expect(conditionStretches(none, none, { side: 'above', level: 0 })).toEqual([
      { from: NEGATIVE_INFINITY, to: POSITIVE_INFINITY },
    ]);
  });

  it('has neighbouring numbers for its open ends', () => {
    for (const time of [0, 1, -1, 1.7e9, -0.1]) {
      expect(justAfter(time)).toBeGreaterThan(time);
      expect(justBefore(justAfter(time))).toBe(time);
      expect((time + justAfter(time)) / 2 === time || (time + justAfter(time)) / 2 === justAfter(time)).toBe(
        true,
      );
    }
  });
});
