import {
  firstCover,
  type GradingSpans,
  gradeSwitch,
  gradeWarning,
  type Stretch,
  stepsBetween,
} from './grading.ts';
import type { ConfirmedSwitch } from './regimeRule.ts';
import type { Happening } from './types.ts';

/**
 * What has to be remembered to grade a live stream: only as far back as a horizon reaches. Plain data: a snapshot is a
 * copy of it.
 */
export interface LiveGradingState {
  /** `at` of the warnings that may still matter, ascending; graded[i]: its outcome has been told */
  warnings: number[];
  graded: boolean[];
  /** onsets of the switches that may still matter, ascending */
  switches: number[];
  /** confirmed, but the watched channels have not been seen as far as the onset */
  waiting: ConfirmedSwitch[];
  sight: Stretch[];
  unseen: Stretch[];
  /** warnings not yet graded */
  open: number;
  /** steps with a full window, and those of them inside the span of some warning */
  watchedSteps: number;
  coveredSteps: number;
}

export const createLiveGrading = (): LiveGradingState => ({
  warnings: [],
  graded: [],
  switches: [],
  waiting: [],
  sight: [],
  unseen: [],
  open: 0,
  watchedSteps: 0,
  coveredSteps: 0,
});

export function noteWarning(state: LiveGradingState, at: number): void {
  state.warnings.push(at);
  state.graded.push(false);
  state.open++;
}

/** A step with a full window at grid time `time`; `begins`: the window was not full at the step before. */
export function noteSight(state: LiveGradingState, time: number, begins: boolean, spans: GradingSpans): void {
  if (begins || state.sight.length === 0) state.sight.push({ from: time, to: time });
  else state.sight[state.sight.length - 1]!.to = time;
  state.watchedSteps++;
  for (let i = state.warnings.length - 1; i >= 0; i--) {
    const steps = stepsBetween(state.warnings[i]!, time, spans.interval);
    if (steps > spans.horizon) break;
    if (steps > spans.leastLead) {
      state.coveredSteps++;
      break;
    }
  }
}

/** The regime channel had nothing between these times. */
export function noteUnseen(state: LiveGradingState, from: number, to: number): void {
  state.unseen.push({ from, to });
}

export function noteSwitch(state: LiveGradingState, found: ConfirmedSwitch): void {
  state.waiting.push(found);
}

/**
 * Tells every outcome that nothing later can change.
 *
 * @param watched time of the newest step of the watched channels, seconds
 * @param settled no switch will any more be stamped at or before this time
 */
export function settle(
  state: LiveGradingState,
  spans: GradingSpans,
  watched: number,
  settled: number,
  happenings: Happening[],
): void {
  let changed = false;
  while (state.waiting.length > 0 && state.waiting[0]!.at <= watched) {
    const found = state.waiting.shift()!;
    state.switches.push(found.at);
    tellSwitch(state, spans, found, happenings);
    changed = true;
  }
  if (state.open > 0) changed = tellWarnings(state, spans, settled, happenings) || changed;
  // the regime channel may be far ahead of the watched ones
  if (changed) forget(state, spans, Math.min(settled, watched));
}

function tellSwitch(
  state: LiveGradingState,
  spans: GradingSpans,
  found: ConfirmedSwitch,
  happenings: Happening[],
): void {
  const grade = gradeSwitch(state, found.at, spans);
  const warningAt = grade.warning === -1 ? null : state.warnings[grade.warning]!;
  happenings.push({ kind: 'switch', ...found, outcome: grade.outcome, warningAt, lead: grade.lead });
}

function tellWarnings(
  state: LiveGradingState,
  spans: GradingSpans,
  settled: number,
  happenings: Happening[],
): boolean {
  let told = false;
  const known = state.waiting.length > 0 ? Math.min(settled, state.waiting[0]!.at - spans.interval) : settled;
  for (let i = 0; i < state.warnings.length; i++) {
    if (state.graded[i]) continue;
    const at = state.warnings[i]!;
    const over = stepsBetween(at, known, spans.interval) > spans.horizon;
    // a warning that has come true stays true: it can be told before its span is over
    if (!over && !isFirstCover(state, i, spans)) continue;
    happenings.push({ kind: 'graded', at, ...gradeWarning(state, i, spans, known) });
    state.graded[i] = true;
    state.open--;
    told = true;
  }
  return told;
}

function isFirstCover(state: LiveGradingState, index: number, spans: GradingSpans): boolean {
  for (let i = state.switches.length - 1; i >= 0 && state.switches[i]! >= state.warnings[index]!; i--) {
    if (firstCover(state.warnings, state.switches[i]!, spans) === index) return true;
  }
  return false;
}

/** Drops what no later outcome can depend on. */
function forget(state: LiveGradingState, spans: GradingSpans, reached: number): void {
  const reach = (spans.horizon + 2) * spans.interval;
  const oldestOpen = state.graded.indexOf(false);
  const openAt = oldestOpen === -1 ? Number.POSITIVE_INFINITY : state.warnings[oldestOpen]!;
  const keepSwitches = Math.min(openAt, reached) - 2 * spans.interval;
  let count = 0;
  while (count < state.switches.length && state.switches[count]! < keepSwitches) count++;
  state.switches.splice(0, count);
  const oldest =
    Math.min(openAt, reached, state.waiting[0]?.at ?? reached, state.switches[0] ?? reached) - reach;
  count = 0;
  while (count < state.warnings.length && state.warnings[count]! < oldest && state.graded[count]) count++;
  state.warnings.splice(0, count);
  state.graded.splice(0, count);
  while (state.sight.length > 1 && state.sight[0]!.to < oldest) state.sight.shift();
  while (state.unseen.length > 0 && state.unseen[0]!.to < oldest) state.unseen.shift();
}
