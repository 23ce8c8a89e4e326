import { describe, expect, it } from 'vitest';
import { HINDMARSH_ROSE_BURSTING, hindmarshRoseSlope } from '../../../server/rigs/hindmarshRose.ts';
import { column, trajectory } from '../../../server/rigs/rungeKutta.ts';

describe('the neuron of Hindmarsh and Rose', () => {
  it('rests where the three equations meet: y = 1 − 5x², z = 4(x + 1.6), I = x³ + 2x² − 1 + z', () => {
    const x = -0.7;
    const z = 4 * (x + 1.6);
    const current = x ** 3 + 2 * x * x - 1 + z;
    const slope = new Float64Array(3);
    hindmarshRoseSlope({ current, slowness: 0.006 })(Float64Array.of(x, 1 - 5 * x * x, z), slope);
    for (const one of slope) expect(Math.abs(one)).toBeLessThan(1e-14);
  });

  it('fires bursts of several spikes, and rests of unlike length between them', () => {
    const states = trajectory(hindmarshRoseSlope(HINDMARSH_ROSE_BURSTING), [0, 0, 3], 0.05, 10, 20_000);
    const x = column(states, 3, 0);
    const waits: number[] = [];
    let last = Number.NaN;
    for (let i = 2000; i < x.length; i++) {
      if (!(x[i - 1]! < 1 && x[i]! >= 1)) continue;
      if (!Number.isNaN(last)) waits.push((i - last) * 0.5);
      last = i;
    }
    const rests = waits.filter((wait) => wait > 35);
    expect(rests.length).toBeGreaterThan(50);
    expect(waits.length).toBeGreaterThan(2 * rests.length);
    expect(Math.max(...rests)).toBeGreaterThan(1.2 * Math.min(...rests));
  });
});
