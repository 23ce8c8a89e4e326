import { describe, expect, it } from 'vitest';
import { DUFFING_WANDERING, duffingSlope } from '../../../server/rigs/duffing.ts';
import { column, trajectory } from '../../../server/rigs/rungeKutta.ts';

describe("Duffing's oscillator", () => {
  it('rests at 0 and ±1 when nothing forces it', () => {
    const slope = new Float64Array(3);
    for (const x of [-1, 0, 1]) {
      duffingSlope({ ...DUFFING_WANDERING, amplitude: 0 })(Float64Array.of(x, 0, 2), slope);
      expect([...slope]).toEqual([0, 0, DUFFING_WANDERING.frequency]);
    }
  });

  it('keeps its energy without damping and forcing', () => {
    const energy = (x: number, y: number) => (y * y - x * x) / 2 + x ** 4 / 4;
    const quiet = duffingSlope({ damping: 0, amplitude: 0, frequency: 1 });
    const states = trajectory(quiet, [0.3, 0.9, 0], 0.01, 10, 500);
    for (let i = 0; i < 500; i++)
      expect(energy(states[3 * i]!, states[3 * i + 1]!)).toBeCloseTo(energy(0.3, 0.9), 7);
  });

  it('wanders between its wells without a period', () => {
    const x = column(trajectory(duffingSlope(DUFFING_WANDERING), [1, 0, 0], 0.01, 5, 40_000), 3, 0);
    const stays: number[] = [];
    let since = 0;
    let side = 1;
    x.forEach((value, i) => {
      if (value * side > -0.5) return;
      stays.push((i - since) * 0.05);
      since = i;
      side = -side;
    });
    expect(stays.length).toBeGreaterThan(100);
    expect(Math.max(...stays)).toBeGreaterThan(3 * Math.min(...stays));
  });
});
