/**
 * P. Ehrhard, U. Müller (1990), "Dynamical behaviour of natural convection in a single-phase loop", Journal of Fluid
 * Mechanics 217, 487–518: the loop model with flow-dependent heat transfer at the wall. The form of the model and the
 * constants (α = 7.99, β = 27.3, K = 0.148, after Harris et al. 2012, Tellus A 64, 17598) are from memory; that the
 * wall law is twice continuously differentiable at 1 is exact. The statistics are recomputed from 200 trajectories of
 * 200 units: orbit 1.110 units (sd 0.13), residence per direction mean 2.53 units (5–95 % 1.13–6.28), rms x 5.438.
 * Here 40 trajectories of 100 units; the residence's tolerance is five standard errors of this shorter run.
 */
import { describe, expect, it } from 'vitest';
import { loopSlope, REVERSING_LOOP, wallTransfer } from '../../server/rigs/loop.ts';
import { createRandom } from '../../server/rigs/random.ts';
import { createStepper, stepInto } from '../../server/rigs/rungeKutta.ts';

describe('Ehrhard and Müller 1990: the wall law', () => {
  it('meets at 1 with equal value, slope and curvature: 1, 1/3, −2/9', () => {
    const step = 1e-4;
    const below = [0, 1, 2, 3].map((k) => wallTransfer(1 - k * step)) as [number, number, number, number];
    const above = [0, 1, 2, 3].map((k) => wallTransfer(1 + k * step)) as [number, number, number, number];
    expect(wallTransfer(1)).toBeCloseTo(1, 14);
    expect(wallTransfer(1 + 1e-12)).toBeCloseTo(1, 11);
    // one-sided differences of second order
    const slope = (v: number[]) => (-3 * v[0]! + 4 * v[1]! - v[2]!) / (2 * step);
    const curvature = (v: number[]) => (2 * v[0]! - 5 * v[1]! + 4 * v[2]! - v[3]!) / (step * step);
    expect(-slope(below)).toBeCloseTo(1 / 3, 6);
    expect(slope(above)).toBeCloseTo(1 / 3, 6);
    expect(curvature(below)).toBeCloseTo(-2 / 9, 4);
    expect(curvature(above)).toBeCloseTo(-2 / 9, 4);
  });

  it('depends on the size of the flow and not on its direction', () => {
    for (const x of [0, 0.3, 1, 4, 8]) expect(wallTransfer(-x)).toBe(wallTransfer(x));
    expect(wallTransfer(8)).toBeCloseTo(2, 14);
  });
});

describe('Ehrhard and Müller 1990: the reversing loop, recomputed', () => {
  const statistics = loopStatistics(40, 100);

  it('keeps reversing in every trajectory', () => {
    expect(statistics.fewestReversals).toBeGreaterThan(0);
  });

  it('takes 1.110 units an orbit', () => {
    expect(Math.abs(statistics.orbit / 1.11 - 1)).toBeLessThan(0.01);
  });

  it('flows 2.53 units in a direction on average', () => {
    expect(Math.abs(statistics.residence / 2.53 - 1)).toBeLessThan(
      (5 * 1.6) / Math.sqrt(statistics.stays) / 2.53,
    );
  });

  it('has an rms flow of 5.438', () => {
    expect(Math.abs(statistics.rms / 5.438 - 1)).toBeLessThan(0.01);
  });
});

/** Runs `count` trajectories of `span` units after 50 of burn-in, step 0.002. */
function loopStatistics(count: number, span: number) {
  const step = 0.002;
  const random = createRandom('loops');
  const stepper = createStepper(loopSlope(REVERSING_LOOP), 3);
  let orbits = 0;
  let orbitCount = 0;
  let residence = 0;
  let stays = 0;
  let squares = 0;
  let fewestReversals = Number.POSITIVE_INFINITY;
  for (let trajectory = 0; trajectory < count; trajectory++) {
    const state = Float64Array.from(
      { length: 3 },
      (_, k) => 2 * random.gaussian() + (k === 2 ? 0.8 * 27.3 : 0),
    );
    for (let i = 0; i < 50 / step; i++) stepInto(stepper, state, step);
    let reversals = 0;
    let reversedAt = Number.NaN;
    let maximumAt = Number.NaN;
    let x = state[0]!;
    let zBefore = Number.NaN;
    let z = state[2]!;
    for (let i = 0; i < span / step; i++) {
      stepInto(stepper, state, step);
      squares += state[0]! ** 2;
      if (x < 0 !== state[0]! < 0) {
        if (!Number.isNaN(reversedAt)) {
          residence += (i - reversedAt) * step;
          stays++;
        }
        reversedAt = i;
        reversals++;
      }
      if (z > zBefore && z >= state[2]!) {
        if (!Number.isNaN(maximumAt)) {
          orbits += (i - maximumAt) * step;
          orbitCount++;
        }
        maximumAt = i;
      }
      x = state[0]!;
      zBefore = z;
      z = state[2]!;
    }
    fewestReversals = Math.min(fewestReversals, reversals);
  }
  return {
    fewestReversals,
    orbit: orbits / orbitCount,
    residence: residence / stays,
    stays,
    rms: Math.sqrt(squares / (count * (span / step))),
  };
}
