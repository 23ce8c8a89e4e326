import { describe, expect, it } from 'vitest';
import { createProjection, projectInto } from '../../../server/embedding/projection.ts';
import { type FitOptions, fitModel } from '../../../server/model/fit.ts';
import { lorenzStates } from '../../../server/rigs/lorenz.ts';
import { createRandom } from '../../../server/rigs/random.ts';
import { column } from '../../../server/rigs/rungeKutta.ts';
import type { InputError } from '../../../server/signal/inputError.ts';
import type { Model } from '../../../shared-types/model.ts';

const { gaussian } = createRandom(4);
const states = lorenzStates({ start: [-8, 8, 27], step: 0.01, every: 2, samples: 8000 });
const noisy = (index: number): Float64Array =>
  column(states, 3, index).map((value) => value + 0.08 * gaussian());
const x = noisy(0);
const z = noisy(2);

const options = (changes: Partial<FitOptions> = {}): FitOptions => ({
  name: 'test',
  channels: [{ channel: 'x', unit: 'K' }],
  delays: 12,
  rank: 4,
  center: 'mean',
  gapIntervals: 3,
  ...changes,
});

const TWO = {
  channels: [
    { channel: 'x', unit: 'K' },
    { channel: 'z', unit: 'mV' },
  ],
};

/** All delay coordinates of all runs, one after the other: windows × rank. */
function allCoordinates(model: Model, runs: Float64Array[][]): Float64Array {
  const projection = createProjection(model.coordinates, model.channels.length, model.delays, model.rank);
  const parts = runs.map((run) => {
    const lines = run.map((values, c) => values.map((value) => value - model.channels[c]!.mean));
    const count = run[0]!.length - model.delays + 1;
    const out = new Float64Array(count * model.rank);
    projectInto(projection, lines, model.delays - 1, count, out);
    return out;
  });
  return Float64Array.from(parts.flatMap((part) => [...part]));
}

const codeOf = (action: () => unknown): string => {
  try {
    action();
  } catch (error) {
    return (error as InputError).code;
  }
  return 'none';
};

describe('the fit', () => {
  it.each([
    { name: 'one run', runs: [[x]], changes: {} },
    { name: 'three runs', runs: [[x.slice(0, 3000)], [x.slice(3100, 3150)], [x.slice(3200)]], changes: {} },
    {
      name: 'two channels',
      runs: [
        [x.slice(0, 4000), z.slice(0, 4000)],
        [x.slice(4100), z.slice(4100)],
      ],
      changes: TWO,
    },
  ])('gives uncorrelated coordinates of unit rms: $name', ({ runs, changes }) => {
    const model = fitModel(runs, 0.02, options(changes));
    const v = allCoordinates(model, runs);
    const windows = v.length / model.rank;
    expect(model.diagnostics.windows).toBe(windows);
    for (let a = 0; a < model.rank; a++) {
      for (let b = 0; b <= a; b++) {
        let sum = 0;
        for (let i = 0; i < windows; i++) sum += v[i * model.rank + a]! * v[i * model.rank + b]!;
        expect(sum / windows).toBeCloseTo(a === b ? 1 : 0, 10);
      }
    }
    const forcing = Array.from({ length: windows }, (_, i) => v[i * model.rank + model.rank - 1]!);
    const share = forcing.filter((value) => Math.abs(value) > 2).length / windows;
    expect(model.diagnostics.forcing.share).toBeCloseTo(share, 12);
    const mean = forcing.reduce((sum, value) => sum + value, 0) / windows;
    const moment = (power: number) =>
      forcing.reduce((sum, value) => sum + (value - mean) ** power, 0) / windows;
    expect(model.diagnostics.forcing.kurtosis).toBeCloseTo(moment(4) / moment(2) ** 2 - 3, 9);
  });

  it('takes no derivative across the end of a run', () => {
    // x three times over, the copies apart: the same regression as once, whatever joins them
    const once = fitModel([[x]], 0.02, options());
    const thrice = fitModel([[x], [x], [x]], 0.02, options());
    for (let i = 0; i < 9; i++) expect(thrice.A[i]).toBeCloseTo(once.A[i]!, 9);
    for (let i = 0; i < 3; i++) expect(thrice.B[i]).toBeCloseTo(once.B[i]!, 9);
  });

  it('does not change with the offset of a channel, even a million times its spread', () => {
    const plain = fitModel([[x]], 0.02, options());
    const offset = fitModel([[x.map((value) => value + 8e6)]], 0.02, options());
    for (let i = 0; i < 9; i++) expect(Math.abs(offset.A[i]! - plain.A[i]!)).toBeLessThan(1e-6);
    for (let i = 0; i < 48; i++)
      expect(Math.abs(offset.coordinates[i]! - plain.coordinates[i]!)).toBeLessThan(1e-7);
  });

  it('keeps A and B when a channel changes its unit, and divides the coordinates', () => {
    const plain = fitModel([[x, z]], 0.02, options(TWO));
    const scaled = fitModel([[x, z.map((value) => 1000 * value)]], 0.02, options(TWO));
    for (let i = 0; i < 9; i++) expect(scaled.A[i]).toBeCloseTo(plain.A[i]!, 7);
    expect(scaled.coordinates[12 * 4]! * 1000).toBeCloseTo(plain.coordinates[12 * 4]!, 9);
  });

  it('tells one step ahead on the tail that was held out, and follows it freely for a window', () => {
    const { heldOut } = fitModel([[x]], 0.02, options()).diagnostics;
    expect(Math.min(...heldOut!.oneStepR2)).toBeGreaterThan(0.95);
    expect(heldOut!.freeRunCorrelation).toBeGreaterThan(0.99);
    const shuffled = Float64Array.from({ length: 4000 }, gaussian);
    expect(fitModel([[shuffled]], 0.02, options()).diagnostics.heldOut!.freeRunCorrelation).toBeLessThan(0.9);
    expect(fitModel([[x.slice(0, 60)]], 0.02, options()).diagnostics.heldOut).toBeNull();
  });

  it('chooses window and rank by itself and says how', () => {
    const { delays, rank, diagnostics } = fitModel([[x]], 0.02, options({ delays: null, rank: null }));
    expect(delays).toBeGreaterThanOrEqual(6);
    expect(delays).toBeLessThanOrEqual(10);
    expect(rank).toBeGreaterThanOrEqual(2);
    expect(rank).toBeLessThan(delays);
    expect(diagnostics.windowChoice).toContain('mutual information');
    expect(diagnostics.rankChoice).toContain('Hankel');
  });

  it.each([
    ['TOO_SHORT', () => fitModel([[x.slice(0, 22)]], 0.02, options())],
    ['CONSTANT', () => fitModel([[new Float64Array(500).fill(3)]], 0.02, options())],
    ['NOT_FINITE', () => fitModel([[x.map((value, i) => (i === 70 ? Number.NaN : value))]], 0.02, options())],
    [
      'NOT_FINITE',
      () => fitModel([[x.map((value, i) => (i === 70 ? Number.POSITIVE_INFINITY : value))]], 0.02, options()),
    ],
    ['BAD_RANK', () => fitModel([[x]], 0.02, options({ rank: 13 }))],
    ['BAD_RANK', () => fitModel([[x]], 0.02, options({ rank: 1 }))],
    ['BAD_DELAYS', () => fitModel([[x]], 0.02, options({ delays: 1 }))],
    ['BAD_INTERVAL', () => fitModel([[x]], 0, options())],
    ['NO_SAMPLES', () => fitModel([], 0.02, options())],
    [
      'RANK_TOO_HIGH',
      () =>
        fitModel([[Float64Array.from({ length: 900 }, (_, i) => (i % 4) - 1.5)]], 0.02, options({ rank: 9 })),
    ],
  ])('refuses with %s', (code, action) => {
    expect(codeOf(action)).toBe(code);
  });

  it('says how many samples a short recording lacks', () => {
    expect(() => fitModel([[x.slice(0, 22)]], 0.02, options())).toThrow(/22 samples .* 23 samples/);
  });
});
