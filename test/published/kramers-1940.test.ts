/**
 * H. A. Kramers (1940), "Brownian motion in a field of force and the diffusion model of chemical reactions", Physica 7,
 * 284–304 (see also L. Gammaitoni et al. 1998, Reviews of Modern Physics 70, 223): a particle in the potential U = −x²/2 +
 * x⁴/4 leaves its well at the rate (√2/2π) exp(−1/(4D)) for weak noise. Formula from memory, rates and the exact mean
 * first passage times (1/D) ∫ from a to b e^{U(y)/D} ∫ from −∞ to y e^{−U(z)/D} dz dy recomputed by quadrature, to half a
 * unit of the last digit. Kramers' rate is 10 to 20 % off even here, so the simulation is held to the exact time.
 */
import { describe, expect, it } from 'vitest';
import { createDoubleWell, doubleWellSeries } from '../../server/rigs/doubleWell.ts';

const potential = (x: number) => -(x * x) / 2 + x ** 4 / 4;

/** The inner integral runs along by Simpson's rule on half steps, the outer one by Simpson's rule on its values. */
function meanPassage(noise: number, from: number, to: number): number {
  const far = -4;
  const steps = 20_000;
  const h = (to - far) / (2 * steps);
  const at = (i: number) => far + i * h;
  const weight = (x: number) => Math.exp(-potential(x) / noise);
  let inner = 0;
  let before = 0;
  let sum = 0;
  for (let i = 1; i <= 2 * steps; i++) {
    inner += (h / 6) * (weight(at(i - 1)) + 4 * weight(at(i - 0.5)) + weight(at(i)));
    const now = at(i) < from - h / 2 ? 0 : Math.exp(potential(at(i)) / noise) * inner;
    if (before > 0) sum += (h / 2) * (before + now);
    before = now;
  }
  return sum / noise;
}

describe('Kramers 1940: the time to cross a barrier', () => {
  it.each([
    [0.05, 0.001517, 729.67, 361.9],
    [0.07, 0.006328, 183.68, 89.195],
    [0.1, 0.018476, 66.269, 30.821],
    [0.15, 0.042512, 29.546, 12.868],
    [0.2, 0.064486, 19.094, 7.934],
    [0.25, 0.082802, 14.278, 5.7434],
  ])(
    'at D = %d has the rate %d, the exact times %d to the other well, %d to the top',
    (noise, rate, well, top) => {
      const kramers = (Math.SQRT2 / (2 * Math.PI)) * Math.exp(-1 / (4 * noise));
      expect(Math.abs(kramers - rate)).toBeLessThanOrEqual(5e-7);
      expect(Math.abs(meanPassage(noise, -1, 1) / well - 1)).toBeLessThan(3e-5);
      expect(Math.abs(meanPassage(noise, -1, 0) / top - 1)).toBeLessThan(3e-5);
    },
  );

  it.each([
    [0.1, 66.269],
    [0.2, 19.094],
  ])('is what the simulated particle takes on average at D = %d: %d', (noise, exact) => {
    const step = 0.005;
    const passages = 1200;
    const next = createDoubleWell(`passages ${noise}`, { noise, step });
    let sum = 0;
    let square = 0;
    // from well to well and back: by symmetry each way takes the same
    for (let passage = 0, side = -1; passage < passages; passage++, side = -side) {
      let steps = 1;
      while (next() * side > -1) steps++;
      sum += steps * step;
      square += (steps * step) ** 2;
    }
    const mean = sum / passages;
    const error = Math.sqrt((square / passages - mean * mean) / passages);
    // a crossing between two steps is seen late: by less than 0.3 here, a sixth of a standard error
    expect(Math.abs(mean - exact)).toBeLessThan(4 * error);
    expect(error / exact).toBeLessThan(0.04);
  });

  it('spends its time as exp(−U/D)', () => {
    const noise = 0.25;
    const values = doubleWellSeries('share of time', { noise, step: 0.005 }, 10, 200_000);
    const bins = [-1.25, -0.75, -0.25, 0.25, 0.75, 1.25];
    const density = (x: number) => Math.exp(-potential(x) / noise);
    const mass = (from: number, to: number) => {
      let sum = 0;
      for (let i = 0; i < 1000; i++) sum += density(from + ((to - from) * (i + 0.5)) / 1000);
      return (sum * (to - from)) / 1000;
    };
    const all = mass(-3, 3);
    bins.slice(1).forEach((to, i) => {
      const from = bins[i]!;
      const share = values.filter((x) => x >= from && x < to).length / values.length;
      // about 10 000 units of time, a memory of about 7 between the wells
      expect(Math.abs(share - mass(from, to) / all)).toBeLessThan(0.05);
    });
  });
});
