/**
 * G. M. Molchan (1991), "Structure of optimal strategies in earthquake prediction", Tectonophysics 193, 267–276: the
 * error diagram. With τ the fraction of time in alarm and ν the fraction of events missed, a warner without knowledge
 * lies on ν = 1 − τ, whose ends are (0, 1), never an alarm, and (1, 0), always one. Formulas from memory, identities
 * exact; skill here is the height above that line, 1 − ν − τ.
 *
 * The chance of at least h of N events in alarm without knowledge, Σ C(N, i) τⁱ (1 − τ)^(N−i) from h to N, is also in
 * J. D. Zechar, T. H. Jordan (2008), Geophysical Journal International 172, 715–724 (from memory); its values are
 * recomputed, to all digits given.
 */
import { describe, expect, it } from 'vitest';
import {
  addTally,
  detectionOf,
  emptyTally,
  type Steps,
  skillOf,
  tauOf,
} from '../../server/rehearsal/tally.ts';
import { molchanSignificance } from '../../server/rehearsal/verification.ts';
import { createRandom } from '../../server/rigs/random.ts';

const COUNT = 60_000;

function stretch(): Steps {
  const random = createRandom('events');
  const switches: number[] = [];
  for (let step = 0; step < COUNT; step++) if (random.uniform() < 0.02) switches.push(step);
  return {
    leastLead: 3,
    horizon: 9,
    count: COUNT,
    known: COUNT - 1,
    scoredFrom: 10,
    watchedBefore: Int32Array.from({ length: COUNT + 1 }, (_, i) => i),
    switches: Int32Array.from(switches),
    unseen: new Float64Array(0),
  };
}

function tallyOf(steps: Steps, warnings: Int32Array) {
  const tally = emptyTally();
  addTally(steps, warnings, warnings.length, new Int32Array(steps.switches.length), tally);
  return tally;
}

describe('Molchan 1991: the error diagram', () => {
  const steps = stretch();

  it('has the silent warner at τ = 0, ν = 1', () => {
    const tally = tallyOf(steps, new Int32Array(0));
    expect([tauOf(tally), detectionOf(tally), skillOf(tally)]).toEqual([0, 0, 0]);
  });

  it('has the warner that always calls at τ = 1, ν = 0', () => {
    const tally = tallyOf(
      steps,
      Int32Array.from({ length: COUNT }, (_, i) => i),
    );
    expect([tauOf(tally), detectionOf(tally), skillOf(tally)]).toEqual([1, 1, 0]);
  });

  it.each([0.005, 0.03, 0.1, 0.4])(
    'has a warner that calls at random, %d a step, on the line between',
    (rate) => {
      const random = createRandom(`calls ${rate}`);
      const calls = Int32Array.from({ length: COUNT }, (_, i) => i).filter(() => random.uniform() < rate);
      const tally = tallyOf(steps, calls);
      // about 1200 events: five standard errors of a share are below 0.072
      expect(Math.abs(skillOf(tally)!)).toBeLessThan(5 * Math.sqrt(0.25 / 1200));
      expect(tauOf(tally)).toBeGreaterThan(0.02);
      expect(tauOf(tally)).toBeLessThan(0.99);
    },
  );
});

describe('Molchan 1991: significance of a point of the diagram', () => {
  it.each([
    [10, 5, 0.2, 0.0327934976],
    [7, 5, 0.3, 0.0287955],
    [15, 4, 0.1, 0.05555563000753602],
    [20, 20, 0.5, 9.5367431640625e-7],
  ])('of %i events, %i in alarm, for %d of the time: %d', (events, warned, tau, chance) => {
    expect(Math.abs(molchanSignificance(warned, events, tau) / chance - 1)).toBeLessThan(1e-12);
  });

  it('is the binomial tail summed term by term, for many events too', () => {
    const events = 400;
    for (const tau of [0.01, 0.2, 0.5, 0.9]) {
      const terms: number[] = [];
      let logTerm = events * Math.log1p(-tau);
      for (let i = 0; i <= events; i++) {
        terms.push(Math.exp(logTerm));
        logTerm += Math.log((events - i) / (i + 1)) + Math.log(tau) - Math.log1p(-tau);
      }
      for (const warned of [0, 1, 4, 80, 200, 360, 400]) {
        const sum = terms.slice(warned).reduceRight((total, term) => total + term, 0);
        const found = molchanSignificance(warned, events, tau);
        expect(Math.abs(found - sum)).toBeLessThan(1e-11 * Math.max(sum, 1e-3));
      }
    }
  });
});
