import type { Variable, WatchRule } from '../../shared-types/watch.ts';
import { type SteppedRule, steppedRule, watchRuleWithDefaults } from '../watch/watchRule.ts';
import { addTally, cameTrueOf, detectionOf, emptyTally, type Steps, skillOf, type Tally } from './tally.ts';
import { type Trace, warningsInto } from './trace.ts';

/** Rule options as a person gives them; null: by default or from the data. Spans in seconds. */
export interface RuleWishes {
  leastLead: number;
  horizon: number;
  threshold: number | null;
  rearm: number | null;
  onDelay: number | null;
  holdOff: number | null;
}

/** What a person agreed to; null: no ceiling of this kind. */
export interface Ceiling {
  falsePerHour: number | null;
  cameTrue: number | null;
}

/** A watch rule and how it does on the part it was tried on. */
export interface OperatingPoint {
  rule: WatchRule;
  tally: Tally;
  warnings: number;
  skill: number;
  detection: number;
  cameTrue: number | null;
  falsePerHour: number;
}

/** A watched variable over a stretch that may be used for choosing. */
export interface Tried {
  trace: Trace;
  steps: Steps;
}

/** Thresholds in a sweep. */
const THRESHOLDS = 64;

/**
 * Thresholds spread over the upper part of a variable: the values exceeded in 70 % … 0.05 % of the watched steps, in
 * equal ratios.
 *
 * @returns ascending for a rising variable, descending for a falling one, without repetitions
 */
export function spreadThresholds(tried: readonly Tried[], sign: 1 | -1, count = THRESHOLDS): number[] {
  const values = Float64Array.from(
    tried.flatMap(({ trace, steps }) =>
      Array.from(trace.value.subarray(0, steps.count).filter((value) => !Number.isNaN(value))),
    ),
    (value) => sign * value,
  ).sort();
  if (values.length === 0) return [];
  const thresholds = new Set<number>();
  for (let i = 0; i < count; i++) {
    const share = 0.7 * (0.0005 / 0.7) ** (i / (count - 1));
    thresholds.add(sign * values[Math.min(values.length - 1, Math.floor((1 - share) * values.length))]!);
  }
  return [...thresholds];
}

/**
 * Tries one rule on stretches of grid steps.
 *
 * @returns null where no switch counts
 */
export function tryRule(tried: readonly Tried[], rule: WatchRule, interval: number): OperatingPoint | null {
  const stepped: SteppedRule = steppedRule(rule, interval);
  const tally = emptyTally();
  let warnings = 0;
  for (const { trace, steps } of tried) {
    const out = new Int32Array(steps.count);
    const size = warningsInto(trace, steps.count, stepped, out);
    for (let i = 0; i < size; i++) out[i] = trace.stamp[out[i]!]!;
    addTally(steps, out, size, new Int32Array(steps.switches.length), tally);
    warnings += size;
  }
  const skill = skillOf(tally);
  if (skill === null) return null;
  return {
    rule,
    tally,
    warnings,
    skill,
    detection: detectionOf(tally)!,
    cameTrue: cameTrueOf(tally),
    falsePerHour: tally.warnings.false / ((tally.watched * interval) / 3600),
  };
}

/**
 * All operating points of a sweep of thresholds over a variable; a threshold that was wished for is the only one.
 *
 * @throws RangeError when the wishes contradict themselves
 */
export function sweepThresholds(
  tried: readonly Tried[],
  wishes: RuleWishes,
  interval: number,
  variable: Variable = 'forcing',
  direction: 'rising' | 'falling' = 'rising',
): OperatingPoint[] {
  const thresholds =
    wishes.threshold === null ? spreadThresholds(tried, direction === 'rising' ? 1 : -1) : [wishes.threshold];
  return thresholds
    .map((threshold) => tryRule(tried, ruleOfWishes(wishes, threshold, variable, direction), interval))
    .filter((point) => point !== null);
}

/** The watch rule of wishes with a threshold; what was not wished for is by default. */
export function ruleOfWishes(
  wishes: RuleWishes,
  threshold: number,
  variable: Variable = 'forcing',
  direction: 'rising' | 'falling' = 'rising',
): WatchRule {
  return watchRuleWithDefaults({
    variable,
    direction,
    threshold,
    leastLead: wishes.leastLead,
    horizon: wishes.horizon,
    ...(wishes.rearm === null ? {} : { rearm: wishes.rearm }),
    ...(wishes.onDelay === null ? {} : { onDelay: wishes.onDelay }),
    ...(wishes.holdOff === null ? {} : { holdOff: wishes.holdOff }),
  });
}

/** A chosen point; weak: none was within the ceiling (without one: with half of the warnings coming true). */
export interface ChosenPoint {
  point: OperatingPoint;
  weak: boolean;
}

/**
 * Chooses among operating points: the highest skill within the ceiling; without one, the highest skill with at least
 * half of the warnings coming true; only if there is none, the plain maximum, called weak. Ties go to fewer warnings.
 *
 * @returns null when there are no points
 */
export function choosePoint(points: readonly OperatingPoint[], ceiling: Ceiling | null): ChosenPoint | null {
  const within = points.filter((point) => isWithin(point, ceiling));
  const point = best(within.length > 0 ? within : points);
  return point === null ? null : { point, weak: within.length === 0 };
}

function isWithin(point: OperatingPoint, ceiling: Ceiling | null): boolean {
  const { falsePerHour, cameTrue } = ceiling ?? { falsePerHour: null, cameTrue: null };
  const leastTrue = cameTrue ?? (falsePerHour === null ? 0.5 : 0);
  if (falsePerHour !== null && point.falsePerHour > falsePerHour) return false;
  return (point.cameTrue ?? 0) >= leastTrue && point.warnings > 0;
}

function best(points: readonly OperatingPoint[]): OperatingPoint | null {
  let found: OperatingPoint | null = null;
  for (const point of points) {
    const gain = found === null ? 1 : point.skill - found.skill;
    if (gain > 1e-12 || (gain > -1e-12 && point.warnings < found!.warnings)) found = point;
  }
  return found;
}
