import type { WatchRule } from '../../shared-types/watch.ts';
import type { SteppedRule } from '../watch/watchRule.ts';
import {
  addTally,
  cameTrueOf,
  detectionOf,
  emptyTally,
  mergeTally,
  type Steps,
  skillOf,
  type Tally,
  warningsOf,
} from './tally.ts';
import { type Trace, warningsInto } from './trace.ts';

/** What a person agreed to; null: no ceiling of this kind. */
export interface Ceiling {
  falsePerHour: number | null;
  cameTrue: number | null;
}

/** A watch rule and how it does on the part it was tried on. */
export interface OperatingPoint {
  rule: WatchRule;
  tally: Tally;
  /** what was counted in each fold; empty where no folds were asked for */
  folds: Tally[];
  warnings: number;
  skill: number;
  detection: number;
  cameTrue: number | null;
  falsePerHour: number;
}

/** A watched variable over a stretch, with scratch space for trying rules on it. */
export interface Tried {
  trace: Trace;
  steps: Steps;
  /** fold k is the steps foldFrom[k] … foldFrom[k + 1] − 1; empty: no folds */
  foldFrom: readonly number[];
  /** steps at which the rule tried last warned, the first `size` entries; and what of them covers each switch */
  warnings: Int32Array;
  size: number;
  cover: Int32Array;
}

/** A variable over a stretch, made ready for trying rules on it. */
export function createTried(trace: Trace, steps: Steps, foldFrom: readonly number[] = []): Tried {
  return {
    trace,
    steps,
    foldFrom,
    warnings: new Int32Array(steps.count),
    size: 0,
    cover: new Int32Array(steps.switches.length),
  };
}

/** Writes the steps at which something warns, stamped where the newest sample was, into `tried.warnings`; how many. */
export type Warner = (tried: Tried) => number;

/** Thresholds in a sweep. */
const THRESHOLDS = 64;

/** Values from which thresholds are taken, about. */
const SAMPLED = 65_536;

/**
 * Thresholds spread over the upper part of a variable: the values exceeded in 70 % … 0.05 % of the watched steps, in
 * equal ratios. Of long stretches every second, third … value is looked at.
 *
 * @returns ascending for a rising variable, descending for a falling one, without repetitions
 */
export function spreadThresholds(tried: readonly Tried[], sign: 1 | -1, count = THRESHOLDS): number[] {
  const steps = tried.reduce((sum, { steps }) => sum + steps.count, 0);
  const stride = Math.max(1, Math.floor(steps / SAMPLED));
  const sampled = new Float64Array(Math.ceil(steps / stride) + tried.length);
  let size = 0;
  for (const { trace, steps } of tried) {
    for (let i = 0; i < steps.count; i += stride) {
      if (!Number.isNaN(trace.value[i]!)) sampled[size++] = sign * trace.value[i]!;
    }
  }
  if (size === 0) return [];
  const values = sampled.subarray(0, size).sort();
  const thresholds = new Set<number>();
  for (let i = 0; i < count; i++) {
    const share = 0.7 * (0.0005 / 0.7) ** (i / (count - 1));
    thresholds.add(sign * values[Math.min(size - 1, Math.floor((1 - share) * size))]!);
  }
  return [...thresholds];
}

/** The warner that steps a rule over a trace. */
export function warnerOf(stepped: SteppedRule): Warner {
  return ({ trace, steps, warnings }) => {
    const size = warningsInto(trace, steps.count, stepped, warnings);
    for (let i = 0; i < size; i++) warnings[i] = trace.stamp[warnings[i]!]!;
    return size;
  };
}

/**
 * Tries any warner on stretches of grid steps; `rule` only names it.
 *
 * @returns null where no switch counts
 */
export function tryWarner(
  tried: readonly Tried[],
  warner: Warner,
  rule: WatchRule,
  interval: number,
): OperatingPoint | null {
  const tally = emptyTally();
  const folds: Tally[] = [];
  for (const one of tried) {
    const { steps, warnings, cover, foldFrom } = one;
    const size = warner(one);
    one.size = size;
    if (foldFrom.length === 0) addTally(steps, warnings, size, cover, tally);
    // what is counted from one step on, less what is counted from a later one, is what lies between
    for (let k = 0; k + 1 < foldFrom.length; k++) {
      folds[k] ??= emptyTally();
      if (foldFrom[k] === foldFrom[k + 1]) continue;
      const fold = tallyFrom(one, size, foldFrom[k]!);
      if (foldFrom[k + 1]! < steps.count) mergeTally(fold, tallyFrom(one, size, foldFrom[k + 1]!), -1);
      mergeTally(folds[k]!, fold);
      mergeTally(tally, fold);
    }
  }
  return pointOf(rule, tally, folds, interval);
}

function tallyFrom({ steps, warnings, cover }: Tried, size: number, scoredFrom: number): Tally {
  const tally = emptyTally();
  addTally({ ...steps, scoredFrom }, warnings, size, cover, tally);
  return tally;
}

/** A rule with what was counted of it; null where no switch counts. */
export function pointOf(
  rule: WatchRule,
  tally: Tally,
  folds: Tally[],
  interval: number,
): OperatingPoint | null {
  const skill = skillOf(tally);
  if (skill === null) return null;
  return {
    rule,
    tally,
    folds,
    warnings: warningsOf(tally),
    skill,
    detection: detectionOf(tally)!,
    cameTrue: cameTrueOf(tally),
    falsePerHour: tally.watched === 0 ? 0 : tally.warnings.false / ((tally.watched * interval) / 3600),
  };
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

/** Whether a point keeps within a ceiling; without one: whether half of its warnings come true. */
export function isWithin(point: OperatingPoint, ceiling: Ceiling | null): boolean {
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
