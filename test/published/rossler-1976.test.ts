/**
 * O. E. Rössler (1976), "An equation for continuous chaos", Physics Letters A 57, 397–398, with a = b = 0.2, c = 5.7.
 * Exact: the points of rest, x = (c ± √(c² − 4ab))/2 = 0.00702620483 and 5.69297379517, y = −x/a, z = x/a. Volumes
 * shrink at the mean of a + x − c, which is the sum of the Lyapunov exponents: 0.0714 + 0 − 5.3943 in the table of
 * J. C. Sprott (2003), Chaos and Time-Series Analysis, Oxford (read); recomputed 0.07114 − 0.0002 − 5.3961 with errors of
 * a few units of the last digit but one. The two differ by 0.002; the tolerance is 0.005.
 */
import { describe, expect, it } from 'vitest';
import { ROSSLER_USUAL, rosslerSlope } from '../../server/rigs/rossler.ts';
import { createStepper, stepInto } from '../../server/rigs/rungeKutta.ts';

const { a, c } = ROSSLER_USUAL;

describe('Rössler 1976', () => {
  it.each([0.00702620483, 5.69297379517])('rests at x = %d, y = −x/a, z = x/a', (x) => {
    const slope = new Float64Array(3);
    rosslerSlope(ROSSLER_USUAL)(Float64Array.of(x, -x / a, x / a), slope);
    // half a unit of the last digit of x, times the largest factor by which it enters
    for (const one of slope) expect(Math.abs(one)).toBeLessThan(5e-12 * 60);
  });

  it('shrinks volumes at the sum of the published exponents', () => {
    const step = 0.02;
    const stepper = createStepper(rosslerSlope(ROSSLER_USUAL), 3);
    const state = Float64Array.of(1, 1, 0);
    for (let i = 0; i < 200 / step; i++) stepInto(stepper, state, step);
    let sum = 0;
    const steps = 20_000 / step;
    for (let i = 0; i < steps; i++) {
      stepInto(stepper, state, step);
      sum += state[0]!;
    }
    expect(Math.abs(a + sum / steps - c - (0.0714 - 5.3943))).toBeLessThan(0.005);
  });
});
