/**
 * A. M. Fraser, H. L. Swinney (1986), "Independent coordinates for strange attractors from mutual information",
 * Physical Review A 33, 1134–1140. First minima, all within one lag (recomputed with 64 bins and 60,000 points, except
 * where said):
 *
 *   Lorenz 16, 45.92, 4     interval 0.01   lag 10   (also Abarbanel et al. 1993, Reviews of Modern Physics 65, 1331)
 *   Lorenz 10, 28, 8/3      interval 0.01   lag 16   ("0.16 to 0.18" is commonly quoted)
 *   Rössler 0.2, 0.2, 5.7   interval 0.1    lag 14   (30,000 points)
 */
import { describe, expect, it } from 'vitest';
import { averageMutualInformation, chooseDelays } from '../../server/embedding/windowChoice.ts';
import { lorenzSeries } from '../../server/rigs/lorenz.ts';
import { createRandom } from '../../server/rigs/random.ts';
import { column, trajectory } from '../../server/rigs/rungeKutta.ts';

const BURN_IN = 2000;

describe('the first minimum of the average mutual information', () => {
  it('is lag 10 for the Lorenz system at 16, 45.92, 4', () => {
    const parameters = { sigma: 16, rho: 45.92, beta: 4 };
    const x = lorenzSeries({
      start: [1, 1, 40],
      step: 0.005,
      every: 2,
      samples: 60_000 + BURN_IN,
      parameters,
    });
    expect(Math.abs(chooseDelays([x.subarray(BURN_IN)]).delays - 10)).toBeLessThanOrEqual(1);
  });

  it('is lag 16 for the Lorenz system at 10, 28, 8/3', () => {
    const x = lorenzSeries({ start: [-8, 8, 27], step: 0.01, every: 1, samples: 60_000 + BURN_IN });
    const choice = chooseDelays([x.subarray(BURN_IN)]);
    expect(Math.abs(choice.delays - 16)).toBeLessThanOrEqual(1);
    expect(choice.words).toContain('first minimum');
  });

  it('is lag 14 for the Rössler system at 0.2, 0.2, 5.7', () => {
    const states = trajectory(
      (state, slope) => {
        slope[0] = -state[1]! - state[2]!;
        slope[1] = state[0]! + 0.2 * state[1]!;
        slope[2] = 0.2 + state[2]! * (state[0]! - 5.7);
      },
      [1, 1, 0],
      0.025,
      4,
      33_000,
    );
    expect(Math.abs(chooseDelays([column(states, 3, 0).subarray(3000)]).delays - 14)).toBeLessThanOrEqual(1);
  });

  it('is below its bias bound (63²)/(2N ln 2) for white noise at any lag', () => {
    const { gaussian } = createRandom(3);
    const noise = Float64Array.from({ length: 60_000 }, gaussian);
    for (const lag of [1, 7, 50]) {
      const bits = averageMutualInformation([noise], lag);
      expect(bits).toBeGreaterThan(0.02);
      expect(bits).toBeLessThan(0.048);
    }
  });
});
