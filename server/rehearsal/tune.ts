import type { GradingSpans } from '../watch/grading.ts';
import { steppedRule } from '../watch/watchRule.ts';
import { stepsOfTrace } from './cut.ts';
import { heldOutPoint } from './folds.ts';
import type { GriddedRecording } from './gridded.ts';
import { type Asked, type Manner, mannersOf, ruleOfManner } from './manner.ts';
import type { Signal } from './signal.ts';
import {
  type Ceiling,
  choosePoint,
  createTried,
  isWithin,
  type OperatingPoint,
  spreadThresholds,
  type Tried,
  tryWarner,
  warnerOf,
} from './threshold.ts';
import { type Places, placesOf } from './trace.ts';

/** Stretches on which something is tried. */
export interface Ground {
  recordings: readonly GriddedRecording[];
  places: readonly Places[];
  /** where folds begin in each, see `foldStarts`; empty lists: no folds */
  folds: readonly (readonly number[])[];
  /** seconds from which each is counted */
  scoredFrom: readonly number[];
  spans: GradingSpans;
  asked: Asked;
  ceiling: Ceiling | null;
}

/** A signal with one manner, and what choosing its threshold is worth. */
export interface Tuned {
  signal: Signal;
  manner: Manner;
  /** skill and the rest on folds that did not choose the threshold */
  merit: OperatingPoint;
  /** the threshold chosen on all folds, and how it does on them; weak: none was within the ceiling */
  point: OperatingPoint;
  weak: boolean;
  /** the same for the threshold of the plain maximum of skill */
  plain: { merit: OperatingPoint; point: OperatingPoint };
}

/** Ground for trying signals on recordings. */
export function createGround(
  recordings: readonly GriddedRecording[],
  folds: Ground['folds'],
  scoredFrom: readonly number[],
  rest: Pick<Ground, 'spans' | 'asked' | 'ceiling'>,
): Ground {
  const { spans, asked, ceiling } = rest;
  return { recordings, places: recordings.map(placesOf), folds, scoredFrom, spans, asked, ceiling };
}

/** The same ground without what was held fixed: it was meant for another variable's scale. */
export function freeGround(ground: Ground): Ground {
  return { ...ground, asked: { ...ground.asked, rearm: null, onDelay: null, holdOff: null } };
}

/** A signal over all of the ground, ready for trying rules on. */
export function triedOn(ground: Ground, signal: Signal): Tried[] {
  return ground.recordings.map((recording, i) => {
    const trace = signal.trace(recording, ground.places[i]!);
    const steps = stepsOfTrace(recording, trace, ground.spans, ground.scoredFrom[i]!);
    return createTried(trace, steps, ground.folds[i] ?? []);
  });
}

/** Every threshold of a signal in one manner. */
export function sweep(
  ground: Ground,
  tried: readonly Tried[],
  signal: Signal,
  manner: Manner,
  thresholds: readonly number[],
): OperatingPoint[] {
  const { interval } = ground.spans;
  const points: OperatingPoint[] = [];
  for (const threshold of thresholds) {
    const rule = ruleOfManner(manner, ground.asked, signal.variable, signal.direction, threshold);
    if (rule === null) continue;
    const point = tryWarner(tried, warnerOf(steppedRule(rule, interval)), rule, interval);
    if (point !== null) points.push(point);
  }
  return points;
}

/** Thresholds of a signal: its own, the one asked for, or a spread over its values. */
export function thresholdsOf(signal: Signal, tried: readonly Tried[], count?: number): readonly number[] {
  return signal.thresholds ?? spreadThresholds(tried, signal.direction === 'falling' ? -1 : 1, count);
}

/** The manners of a signal on this ground, the usual one first. */
export function mannersOn(ground: Ground, tried: readonly Tried[], signal: Signal): Manner[] {
  const spread = signal.quietIsZero ? null : spreadOf(tried);
  return mannersOf(ground.asked, spread, ground.spans.interval);
}

/**
 * Tunes a signal in each of several manners.
 *
 * @returns one entry a manner in which some switch counts, and how many rules were tried
 */
export function tune(
  ground: Ground,
  tried: readonly Tried[],
  signal: Signal,
  manners: readonly Manner[],
  thresholds: readonly number[],
): { tuned: Tuned[]; rules: number } {
  const tuned: Tuned[] = [];
  let rules = 0;
  for (const manner of manners) {
    const points = sweep(ground, tried, signal, manner, thresholds);
    rules += points.length;
    const strict = choiceOf(ground, points, ground.ceiling);
    const plain = choiceOf(ground, points, PLAIN);
    if (strict !== null && plain !== null) tuned.push({ signal, manner, ...strict, plain });
  }
  return { tuned, rules };
}

/** No ceiling at all, so that the plain maximum of skill is chosen. */
export const PLAIN: Ceiling = { falsePerHour: null, cameTrue: 0 };

function choiceOf({ spans }: Ground, points: readonly OperatingPoint[], ceiling: Ceiling | null) {
  const merit = heldOutPoint(points, ceiling, spans.interval);
  const chosen = choosePoint(points, ceiling);
  return merit === null || chosen === null ? null : { merit, ...chosen };
}

/**
 * The best by what choosing it is worth; null of none. With a ceiling, the best within it. Without one, the best of
 * which half of the warnings come true and whose skill, on folds that did not choose the threshold, is more than luck
 * (a handful of lucky warnings is not); if there is none, the best plain maximum, called weak.
 */
export function bestTuned<T extends Tuned>(tuned: readonly T[], ceiling: Ceiling | null): T | null {
  if (ceiling !== null) return bestBy(tuned, ceiling);
  const sound = tuned.filter(({ merit, weak }) => !weak && isWithin(merit, null) && isSound(merit));
  if (sound.length > 0) return bestBy(sound, null);
  return bestBy(tuned.map(resolvedPlain), PLAIN);
}

const resolvedPlain = <T extends Tuned>(one: T): T => ({ ...one, ...one.plain, weak: true });

function bestBy<T extends Tuned>(tuned: readonly T[], ceiling: Ceiling | null): T | null {
  const best = choosePoint(
    tuned.map(({ merit }) => merit),
    ceiling,
  );
  return best === null ? null : (tuned.find(({ merit }) => merit === best.point) ?? null);
}

/**
 * Whether a skill is more than luck: above two standard errors of the detection, two warned and two missed switches
 * added.
 *
 * @see Agresti, Coull 1998, The American Statistician 52, 119 (the four added)
 */
function isSound({ skill, tally }: OperatingPoint): boolean {
  const { warned, late, missed } = tally.switches;
  const total = warned + late + missed + 4;
  const share = (warned + 2) / total;
  return skill > 2 * Math.sqrt((share * (1 - share)) / total);
}

/** Standard deviation of a signal's values, of every second, third … of many. */
function spreadOf(tried: readonly Tried[]): number {
  const steps = tried.reduce((sum, one) => sum + one.steps.count, 0);
  const stride = Math.max(1, Math.floor(steps / 65_536));
  let count = 0;
  let mean = 0;
  let square = 0;
  for (const { trace, steps: of } of tried) {
    for (let i = 0; i < of.count; i += stride) {
      const value = trace.value[i]!;
      if (Number.isNaN(value)) continue;
      count++;
      const off = value - mean;
      mean += off / count;
      square += off * (value - mean);
    }
  }
  return count === 0 ? 0 : Math.sqrt(square / count);
}
