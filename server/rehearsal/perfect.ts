import { addTally, emptyTally, isBlind, type Steps, skillOf } from './tally.ts';

/**
 * The perfect warner: in time order one warning M + 1 steps before each switch not yet covered. Blind switches are
 * outside every ratio, so it spends no span on them.
 *
 * @returns steps, ascending
 */
export function perfectWarnings(steps: Steps): Int32Array {
  const { switches, leastLead, horizon } = steps;
  const warnings: number[] = [];
  let reaches = Number.NEGATIVE_INFINITY;
  for (const e of switches) {
    if (e <= reaches || isBlind(steps, e)) continue;
    const a = e - leastLead - 1;
    warnings.push(a);
    reaches = a + horizon;
  }
  return Int32Array.from(warnings);
}

/** The perfect warner's skill over several stretches; null where no switch counts. */
export function perfectSkill(stretches: readonly Steps[]): number | null {
  const tally = emptyTally();
  for (const steps of stretches) {
    const warnings = perfectWarnings(steps);
    addTally(steps, warnings, warnings.length, new Int32Array(steps.switches.length), tally);
  }
  return skillOf(tally);
}

/** Below this skill of the perfect warner no share is given: the horizon is too long for such frequent switches. */
export const LEAST_PERFECT_SKILL = 0.2;

/** skill / skill of the perfect warner; null where either is not known or the latter is below 0.2. */
export function skillShareOf(skill: number | null, perfect: number | null): number | null {
  if (skill === null || perfect === null || perfect < LEAST_PERFECT_SKILL) return null;
  return skill / perfect;
}
