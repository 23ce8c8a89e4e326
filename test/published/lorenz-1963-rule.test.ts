/**
 * E. N. Lorenz (1963), "Deterministic nonperiodic flow", Journal of the Atmospheric Sciences 20, 130–141, Fig. 4: the
 * trajectory changes sides exactly when a maximum of z exceeds the cusp of the map of maxima. The cusp at 38.55 and the
 * figures of the lead are recomputed (400 trajectories of 300 units): from the maximum to the change of sign of x 0.222
 * on average, 0.154 to 0.330 for nine in ten, 0.132 at least; errors of the rule 3e-4.
 *
 * A warner that follows this rule, seeing no further than the sample after a maximum, knows nearly everything. So it must
 * score as such; and the same number of warnings after maxima below the cusp must score as what they are.
 */
import { describe, expect, it } from 'vitest';
import { findSwitches } from '../../server/rehearsal/gridded.ts';
import { scoreRecords } from '../../server/rehearsal/score.ts';
import { lorenzStates } from '../../server/rigs/lorenz.ts';
import { createRandom } from '../../server/rigs/random.ts';
import { column } from '../../server/rigs/rungeKutta.ts';
import { parseRegimeRule } from '../../server/watch/regimeRuleText.ts';

const INTERVAL = 0.01;
const SAMPLES = 100_000;
const CUSP = 38.55;

const states = lorenzStates({ start: [-8, 8, 27], step: 0.002, every: 5, samples: SAMPLES });
const x = column(states, 3, 0);
const z = column(states, 3, 2);
const times = x.map((_, i) => i * INTERVAL);

const { switches, known } = findSwitches(
  { channel: 'x', times, values: x },
  { regime: parseRegimeRule('sides:-0.8,0.8'), interval: INTERVAL, gapIntervals: 3 },
);

/** Times at which a maximum of z of the wanted height has just been seen. */
function warningsAfterMaxima(wanted: (height: number) => boolean): number[] {
  const warnings: number[] = [];
  for (let i = 2; i < SAMPLES; i++) {
    const [before, top, after] = [z[i - 2]!, z[i - 1]!, z[i]!];
    if (!(top > before && top >= after)) continue;
    const height = top - (after - before) ** 2 / (8 * (before - 2 * top + after));
    if (wanted(height)) warnings.push(times[i]!);
  }
  return warnings;
}

/** Least lead 0.1, horizon 0.6: a warning speaks of the orbit that has begun and of no other. */
function scoreOf(warnings: number[]) {
  const end = times[SAMPLES - 1]!;
  const record = {
    start: 0,
    end,
    known: Math.min(known, end),
    scoredFrom: 0.6,
    warnings,
    switches: switches.map(({ at }) => at),
    sight: [{ from: 0, to: end }],
    unseen: [],
  };
  const spans = { interval: INTERVAL, leastLead: 10, horizon: 60 };
  return scoreRecords([record], spans, { uniform: createRandom('shifts of the rule').uniform });
}

describe('Lorenz 1963: the rule of the z maximum as a warner', () => {
  const score = scoreOf(warningsAfterMaxima((height) => height > CUSP));

  it('warns of nearly every one of some 568 switches, nearly always rightly', () => {
    expect(Math.abs(score.switches.total - 568)).toBeLessThan(60);
    expect(score.switches.blind).toBe(0);
    expect(score.detection.value!).toBeGreaterThan(0.995);
    expect(score.cameTrue.value!).toBeGreaterThan(0.995);
    expect(score.warnings.repeat).toBeLessThanOrEqual(1);
  });

  it('has nearly all the skill of a perfect warner, and none of it by chance', () => {
    expect(score.skillShare!).toBeGreaterThan(0.99);
    expect(score.skillShare!).toBeLessThanOrEqual(1);
    expect(score.pValue!).toBeLessThan(0.002);
  });

  it('leads by 0.222 on average, by 0.154 to 0.330 nine times in ten, less the sample it waits for', () => {
    // the lead counts from one to two samples after the maximum
    expect(score.lead.median! + 1.5 * INTERVAL).toBeGreaterThan(0.19);
    expect(score.lead.median! + 1.5 * INTERVAL).toBeLessThan(0.222 + INTERVAL);
    expect(score.lead.p10! + 2 * INTERVAL).toBeGreaterThan(0.154);
    expect(score.lead.p90!).toBeLessThan(0.33);
  });

  it('knows nothing of switches after maxima below the cusp: warning then is worse than chance', () => {
    const wrong = scoreOf(warningsAfterMaxima((height) => height < CUSP));
    expect(wrong.switches.warned / wrong.switches.total).toBeLessThan(0.01);
    expect(wrong.skill!).toBeLessThan(-0.2);
    expect(wrong.pValue!).toBeGreaterThan(0.9);
  });

  it('loses skill when the cusp is misjudged, either way', () => {
    for (const level of [36, 41]) {
      const misjudged = scoreOf(warningsAfterMaxima((height) => height > level));
      expect(misjudged.skillShare!).toBeLessThan(score.skillShare! - 0.05);
    }
  });
});
