/**
 * E. N. Lorenz (1963), "Deterministic nonperiodic flow", Journal of the Atmospheric Sciences 20, 130–141: the closed
 * forms of his equations (exact), and his Fig. 4: the successor of a maximum of z is a function of it with one cusp,
 * and the trajectory changes sides exactly when the maximum exceeds the cusp.
 *
 * The figures of the trajectory and of the switching statistics are recomputed, not printed in the paper: trajectory
 * from (−8, 8, 27) by two integrators that agree to the tolerance stated; statistics from 400 trajectories of 300 units
 * after 30 units of burn-in (mean between sign changes of x 1.744 ± 0.005). Here 60 trajectories of 100 units are run,
 * so that a statistical tolerance is five standard errors of this shorter run where that exceeds the stated one.
 */
import { EigenvalueDecomposition, Matrix } from 'ml-matrix';
import { describe, expect, it } from 'vitest';
import { LORENZ_1963, lorenzSeries, lorenzSlope, lorenzStates } from '../../server/rigs/lorenz.ts';
import { createRandom } from '../../server/rigs/random.ts';
import { createStepper, stepInto } from '../../server/rigs/rungeKutta.ts';

const { sigma, rho, beta } = LORENZ_1963;
const side = Math.sqrt(beta * (rho - 1));

/** The Jacobian by the slope itself: it is quadratic, so central differences are exact up to rounding. */
function jacobian(at: [number, number, number]): Matrix {
  const slope = lorenzSlope(LORENZ_1963);
  const plus = new Float64Array(3);
  const minus = new Float64Array(3);
  const matrix = Matrix.zeros(3, 3);
  for (let j = 0; j < 3; j++) {
    slope(
      Float64Array.from(at, (value, k) => value + (k === j ? 1 : 0)),
      plus,
    );
    slope(
      Float64Array.from(at, (value, k) => value - (k === j ? 1 : 0)),
      minus,
    );
    for (let i = 0; i < 3; i++) matrix.set(i, j, (plus[i]! - minus[i]!) / 2);
  }
  return matrix;
}

describe('Lorenz 1963: closed forms', () => {
  it('rests at ±√(β(ρ−1)), ±√(β(ρ−1)), ρ−1', () => {
    expect(side).toBeCloseTo(8.48528137424, 11);
    const slope = new Float64Array(3).fill(1);
    for (const sign of [1, -1]) {
      lorenzSlope(LORENZ_1963)(Float64Array.of(sign * side, sign * side, rho - 1), slope);
      for (const value of slope) expect(Math.abs(value)).toBeLessThan(1e-12);
    }
  });

  it('contracts volume at the rate −(σ+1+β) everywhere', () => {
    for (const point of [
      [0, 0, 0],
      [3, -7, 20],
    ] as [number, number, number][]) {
      expect(jacobian(point).trace()).toBeCloseTo(-(sigma + 1 + beta), 12);
    }
    expect(-(sigma + 1 + beta)).toBeCloseTo(-13.6666666667, 10);
  });

  it('has the eigenvalues −22.8277234, −2.6666667, 11.8277234 at the origin', () => {
    const values = [...new EigenvalueDecomposition(jacobian([0, 0, 0])).realEigenvalues].sort(
      (a, b) => a - b,
    );
    const root = Math.sqrt((sigma + 1) ** 2 + 4 * sigma * (rho - 1));
    [(-sigma - 1 - root) / 2, -beta, (-sigma - 1 + root) / 2].forEach((value, k) => {
      expect(Math.abs(values[k]! - value)).toBeLessThan(1e-12);
    });
    // the figures in the title are cut, not rounded, after the seventh digit: one unit of it
    [-22.8277234, -2.6666667, 11.8277234].forEach((value, k) => {
      expect(Math.abs(values[k]! - value)).toBeLessThan(1e-7);
    });
  });

  it('spirals out of C± with 0.0939556 ± 10.1945052 i and in with −13.8545779', () => {
    const found = new EigenvalueDecomposition(jacobian([side, side, rho - 1]));
    const order = [...found.realEigenvalues.keys()].sort(
      (a, b) => found.realEigenvalues[a]! - found.realEigenvalues[b]!,
    );
    expect(Math.abs(found.realEigenvalues[order[0]!]! + 13.8545779)).toBeLessThan(5e-8);
    for (const k of order.slice(1)) {
      expect(Math.abs(found.realEigenvalues[k]! - 0.0939556)).toBeLessThan(5e-8);
      expect(Math.abs(Math.abs(found.imaginaryEigenvalues[k]!) - 10.1945052)).toBeLessThan(5e-8);
    }
  });

  it('loses the stability of C± at ρ = σ(σ+β+3)/(σ−β−1) = 470/19', () => {
    expect((sigma * (sigma + beta + 3)) / (sigma - beta - 1)).toBeCloseTo(470 / 19, 12);
  });
});

describe('Lorenz 1963: the trajectory from (−8, 8, 27), recomputed', () => {
  const x = lorenzSeries({ start: [-8, 8, 27], step: 0.001, every: 1, samples: 20_001 });

  it('reads x(1), x(2), x(5) to 1e-7 and x(10) to 2e-5', () => {
    expect(Math.abs(x[1000]! - 9.05716784)).toBeLessThan(1e-7);
    expect(Math.abs(x[2000]! - 13.56283142)).toBeLessThan(1e-7);
    expect(Math.abs(x[5000]! - 12.5336267)).toBeLessThan(1e-7);
    expect(Math.abs(x[10_000]! - 8.1761)).toBeLessThan(2e-5);
  });

  it('changes the sign of x at the nine stated times', () => {
    const changes: number[] = [];
    for (let i = 1; i < x.length; i++) if (x[i - 1]! < 0 !== x[i]! < 0) changes.push(i / 1000);
    const stated = [0.075, 2.197, 3.777, 6.013, 7.746, 12.621, 13.546, 14.414, 19.978];
    expect(changes).toHaveLength(stated.length);
    stated.forEach((time, k) => {
      expect(Math.abs(changes[k]! - time)).toBeLessThanOrEqual(k < 8 ? 0.001 + 1e-9 : 0.02);
    });
  });
});

describe('Lorenz 1963: the rule of the z maximum and the switching statistics, recomputed', () => {
  const statistics = switchingStatistics(60, 100);

  it('changes sides after a maximum of z above 38.55 and not after one below', () => {
    expect(Math.abs(statistics.highestStaying - 38.55)).toBeLessThan(0.02);
    expect(Math.abs(statistics.lowestSwitching - 38.55)).toBeLessThan(0.02);
  });

  it('has maxima of z between 29.5 and 47.7', () => {
    expect(Math.abs(statistics.lowestMaximum - 29.5)).toBeLessThan(0.3);
    expect(Math.abs(statistics.highestMaximum - 47.7)).toBeLessThan(0.3);
  });

  it('takes 0.7508 units from maximum to maximum', () => {
    expect(Math.abs(statistics.orbit / 0.7508 - 1)).toBeLessThan(0.01);
  });

  it('ends 0.4291 of its orbits in a switch', () => {
    expect(Math.abs(statistics.switchShare - 0.4291)).toBeLessThan(0.012);
  });

  it('stays 1.744 units on a side, 0.766 at least', () => {
    expect(Math.abs(statistics.residence / 1.744 - 1)).toBeLessThan(0.05);
    expect(Math.abs(statistics.shortestStay - 0.766)).toBeLessThan(0.01);
  });

  it('has ⟨x²⟩ 62.81 and ⟨z⟩ 23.55', () => {
    expect(Math.abs(statistics.meanSquare / 62.81 - 1)).toBeLessThan(0.01);
    expect(Math.abs(statistics.meanHeight / 23.55 - 1)).toBeLessThan(0.01);
  });

  it('leads the change of sign by 0.222 units on average, 0.132 at least', () => {
    expect(Math.abs(statistics.lead / 0.222 - 1)).toBeLessThan(0.03);
    expect(Math.abs(statistics.shortestLead - 0.132)).toBeLessThan(0.005);
  });
});

/** Runs `count` trajectories of `span` units after 30 of burn-in, step 0.002, and gathers the figures above. */
function switchingStatistics(count: number, span: number) {
  const step = 0.002;
  const random = createRandom('maxima of z');
  const sums = { squares: 0, heights: 0, samples: 0, orbits: 0, orbitCount: 0, stays: 0, stayCount: 0 };
  const found = {
    highestStaying: 0,
    lowestSwitching: Number.POSITIVE_INFINITY,
    lowestMaximum: Number.POSITIVE_INFINITY,
    highestMaximum: 0,
    shortestStay: Number.POSITIVE_INFINITY,
    shortestLead: Number.POSITIVE_INFINITY,
  };
  let switches = 0;
  let leads = 0;
  for (let trajectory = 0; trajectory < count; trajectory++) {
    const start = Array.from({ length: 3 }, (_, k) => 5 * random.gaussian() + (k === 2 ? 25 : 0)) as [
      number,
      number,
      number,
    ];
    const state = Float64Array.from(start);
    const stepper = createStepper(lorenzSlope(LORENZ_1963), 3);
    for (let i = 0; i < 30 / step; i++) stepInto(stepper, state, step);
    const states = lorenzStates({
      start: [state[0]!, state[1]!, state[2]!],
      step,
      every: 1,
      samples: span / step,
    });
    let changedAt = Number.NaN;
    let maximumAt = Number.NaN;
    let height = Number.NaN;
    let sideThen = 0;
    let crossings = 0;
    let firstCrossing = Number.NaN;
    for (let i = 1; i + 1 < span / step; i++) {
      const x = states[3 * i]!;
      const before = states[3 * i - 1]!;
      const z = states[3 * i + 2]!;
      const after = states[3 * i + 5]!;
      sums.squares += x * x;
      sums.heights += z;
      sums.samples++;
      if (x < 0 !== states[3 * i - 3]! < 0) {
        if (!Number.isNaN(changedAt)) {
          sums.stays += (i - changedAt) * step;
          sums.stayCount++;
          found.shortestStay = Math.min(found.shortestStay, (i - changedAt) * step);
        }
        changedAt = i;
        if (crossings++ === 0) firstCrossing = i;
      }
      if (!(z > before && z >= after)) continue;
      const peak = z - (after - before) ** 2 / (8 * (before - 2 * z + after));
      found.lowestMaximum = Math.min(found.lowestMaximum, peak);
      found.highestMaximum = Math.max(found.highestMaximum, peak);
      const sideNow = Math.sign(x);
      if (!Number.isNaN(maximumAt)) {
        sums.orbits += (i - maximumAt) * step;
        sums.orbitCount++;
        if (sideNow !== sideThen) {
          switches++;
          found.lowestSwitching = Math.min(found.lowestSwitching, height);
          leads += (firstCrossing - maximumAt) * step;
          found.shortestLead = Math.min(found.shortestLead, (firstCrossing - maximumAt) * step);
        } else found.highestStaying = Math.max(found.highestStaying, height);
      }
      maximumAt = i;
      height = peak;
      sideThen = sideNow;
      crossings = 0;
    }
  }
  return {
    ...found,
    orbit: sums.orbits / sums.orbitCount,
    residence: sums.stays / sums.stayCount,
    meanSquare: sums.squares / sums.samples,
    meanHeight: sums.heights / sums.samples,
    switchShare: switches / sums.orbitCount,
    lead: leads / switches,
  };
}
