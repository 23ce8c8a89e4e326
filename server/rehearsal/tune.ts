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
    const merit = heldOutPoint(points, ground.ceiling, ground.spans.interval);
    const chosen = choosePoint(points, ground.ceiling);
    if (merit !== null && chosen !== null) tuned.push({ signal, manner, merit, ...chosen });
  }
  return { tuned, rules };
}

/** The best by what choosing it is worth; null of none. */
export function bestTuned(tuned: readonly Tuned[], ceiling: Ceiling | null): Tuned | null {
  const best = choosePoint(
    tuned.map(({ merit }) => merit),
    ceiling,
  );
  return best === null ? null : (tuned.find(({ merit }) => merit === best.point) ?? null);
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
