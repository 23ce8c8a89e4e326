import { describe, expect, it } from 'vitest';
import { createDisturbance, type Disturbance } from '../../../server/rigs/disturb.ts';
import { createRandom } from '../../../server/rigs/random.ts';

const still: Disturbance = { noise: 0, drift: 0, driftSeconds: 100, dropped: 0, jitter: 0 };

function disturbed(disturbance: Disturbance, count: number): { time: number; value: number }[] {
  const disturb = createDisturbance(disturbance, 0.5, createRandom('chain'));
  return Array.from({ length: count }, (_, i) => {
    const out = { time: 0, value: 0 };
    disturb(0.5 * i, 10, out);
    return out;
  });
}

const deviation = (values: number[]) =>
  Math.sqrt(values.reduce((sum, value) => sum + (value - 10) ** 2, 0) / values.length);

describe('a measuring chain', () => {
  it('changes nothing when told to', () => {
    for (const [i, sample] of disturbed(still, 50).entries())
      expect(sample).toEqual({ time: 0.5 * i, value: 10 });
  });

  it('adds noise of the size told', () => {
    const values = disturbed({ ...still, noise: 0.2 }, 20_000).map(({ value }) => value);
    // five standard errors
    expect(Math.abs(deviation(values) / 0.2 - 1)).toBeLessThan(5 / Math.sqrt(2 * 20_000));
  });

  it('drifts by the size told, and forgets after the time told', () => {
    const values = disturbed({ ...still, drift: 0.2, driftSeconds: 5 }, 40_000).map(({ value }) => value);
    expect(Math.abs(deviation(values) / 0.2 - 1)).toBeLessThan(0.05);
    let product = 0;
    for (let i = 10; i < values.length; i++) product += (values[i]! - 10) * (values[i - 10]! - 10);
    // ten samples are 5 s: correlation 1/e
    expect(product / values.length / 0.04).toBeCloseTo(Math.exp(-1), 1);
  });

  it('drops the share of samples told and moves none of the others', () => {
    const all = disturbed({ ...still, noise: 0.1, jitter: 0.01 }, 5000);
    const some = disturbed({ ...still, noise: 0.1, jitter: 0.01, dropped: 0.1 }, 5000);
    const kept = some.filter(({ value }) => !Number.isNaN(value));
    expect(Math.abs(kept.length - 4500)).toBeLessThan(5 * Math.sqrt(450));
    some.forEach((sample, i) => {
      expect(sample.time).toBe(all[i]!.time);
      if (!Number.isNaN(sample.value)) expect(sample.value).toBe(all[i]!.value);
    });
  });
});
