import type { GradedOutcome, SwitchOutcome } from '../../shared-types/warning.ts';

/**
 * What became of warnings and switches, in whole grid steps: with a a warning's `at`, e a switch, M the least lead and
 * H the horizon, a warning *covers* a switch if M < e − a ≤ H and only *precedes* it if 0 ≤ e − a ≤ M.
 *
 * The same functions grade a whole recording and the live stream, where they are called as soon as nothing that comes
 * later can change the answer.
 */
export interface GradingSpans {
  /** seconds a grid step */
  interval: number;
  /** least lead and horizon in whole grid steps */
  leastLead: number;
  horizon: number;
}

/** Warnings and switches with ascending times (seconds). */
export interface GradingRecord {
  warnings: readonly number[];
  switches: readonly number[];
  /** stretches of steps with a full window: times of the first and last step of each, ascending, disjoint */
  sight: readonly Stretch[];
  /** stretches in which the regime channel could not be seen: times of the samples before and after */
  unseen: readonly Stretch[];
}

export interface Stretch {
  from: number;
  to: number;
}

export interface GradedWarning {
  outcome: GradedOutcome;
  /** the switch that settled it (seconds) and how long after the warning it came; null for false, open and unseen */
  switchAt: number | null;
  lead: number | null;
}

export interface GradedSwitch {
  outcome: SwitchOutcome;
  /** index of the first warning that covers it, −1: none */
  warning: number;
  /** seconds from that warning to the switch; null: none */
  lead: number | null;
}

/** Whole grid steps from a to e. */
export const stepsBetween = (a: number, e: number, interval: number): number =>
  Math.round((e - a) / interval);

/** Index of the first entry of ascending `times` that is ≥ `time`; the length when there is none. */
export function lowerBound(times: readonly number[], time: number): number {
  let low = 0;
  let high = times.length;
  while (low < high) {
    const middle = (low + high) >> 1;
    if (times[middle]! < time) low = middle + 1;
    else high = middle;
  }
  return low;
}

/** Index of the first warning that covers a switch at `e`, −1: none. */
export function firstCover(warnings: readonly number[], e: number, spans: GradingSpans): number {
  const { interval, leastLead, horizon } = spans;
  // one step of slack on either side: the whole-step test below decides
  for (let i = lowerBound(warnings, e - (horizon + 1) * interval); i < warnings.length; i++) {
    const steps = stepsBetween(warnings[i]!, e, interval);
    if (steps <= leastLead) return -1;
    if (steps <= horizon) return i;
  }
  return -1;
}

/**
 * Grades a switch at `e`: blind if no step in [e − H, e − M) had a full window; else warned, late or missed.
 *
 * All warnings with `at` ≤ e must be in the record.
 */
export function gradeSwitch(record: GradingRecord, e: number, spans: GradingSpans): GradedSwitch {
  const { warnings } = record;
  const { interval } = spans;
  if (!couldSee(record.sight, e, spans)) return { outcome: 'blind', warning: -1, lead: null };
  const cover = firstCover(warnings, e, spans);
  if (cover !== -1) return { outcome: 'warned', warning: cover, lead: e - warnings[cover]! };
  for (let i = lowerBound(warnings, e - (spans.leastLead + 1) * interval); i < warnings.length; i++) {
    const steps = stepsBetween(warnings[i]!, e, interval);
    if (steps < 0) break;
    if (steps <= spans.leastLead) return { outcome: 'late', warning: -1, lead: null };
  }
  return { outcome: 'missed', warning: -1, lead: null };
}

/** Whether a step with a full window lies in [e − H, e − M). */
export function couldSee(sight: readonly Stretch[], e: number, spans: GradingSpans): boolean {
  const { interval, leastLead, horizon } = spans;
  for (let i = sight.length - 1; i >= 0; i--) {
    const farthest = stepsBetween(sight[i]!.from, e, interval);
    const nearest = stepsBetween(sight[i]!.to, e, interval);
    if (Math.max(nearest, leastLead + 1) <= Math.min(farthest, horizon)) return true;
    if (nearest > horizon) return false;
  }
  return false;
}

/**
 * Grades the warning with index `index`: true if it is the first to cover some switch; repeat if every switch it
 * covers or precedes by at most M was warned already; else late if a switch follows within M; else unseen if the
 * regime channel has a gap in its span, open if the record ends before the span does, and otherwise false.
 *
 * All switches with e ≤ at + H must be in the record, and all warnings before this one that can cover one of them.
 *
 * @param end time up to which every switch is known (seconds)
 */
export function gradeWarning(
  record: GradingRecord,
  index: number,
  spans: GradingSpans,
  end: number,
): GradedWarning {
  const { warnings, switches, unseen } = record;
  const { interval, leastLead, horizon } = spans;
  const a = warnings[index]!;
  let repeated: number | null = null;
  let late: number | null = null;
  for (let i = lowerBound(switches, a - interval); i < switches.length; i++) {
    const e = switches[i]!;
    const steps = stepsBetween(a, e, interval);
    if (steps < 0) continue;
    if (steps > horizon) break;
    const cover = firstCover(warnings, e, spans);
    if (cover === index) return { outcome: 'true', switchAt: e, lead: e - a };
    if (cover !== -1 && cover < index) repeated ??= e;
    else if (steps <= leastLead) late ??= e;
  }
  if (late !== null) return { outcome: 'late', switchAt: late, lead: late - a };
  if (repeated !== null) return { outcome: 'repeat', switchAt: repeated, lead: repeated - a };
  const none = { switchAt: null, lead: null };
  if (overlaps(unseen, a + leastLead * interval, a + horizon * interval))
    return { outcome: 'unseen', ...none };
  return { outcome: stepsBetween(a, end, interval) < horizon ? 'open' : 'false', ...none };
}

function overlaps(stretches: readonly Stretch[], from: number, to: number): boolean {
  for (let i = stretches.length - 1; i >= 0; i--) {
    if (stretches[i]!.to <= from) return false;
    if (stretches[i]!.from < to) return true;
  }
  return false;
}
