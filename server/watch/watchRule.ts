import type { WatchRule } from '../../shared-types/watch.ts';

/** Remembers where a watch rule stands. Plain data: a snapshot is a copy of it. */
export interface WatchRuleState {
  armed: boolean;
  /** consecutive steps above the threshold, up to on-delay + 1 */
  above: number;
  /** grid time of the last warning, seconds; −Infinity before the first */
  lastWarning: number;
}

/** A watch rule in whole grid steps; for a falling level every comparison is made on the negative. */
export interface SteppedRule {
  /** seconds a step */
  interval: number;
  sign: 1 | -1;
  threshold: number;
  rearm: number;
  onDelay: number;
  holdOff: number;
  leastLead: number;
  horizon: number;
}

/** Seconds to whole grid steps, to the nearest. */
export const toSteps = (seconds: number, interval: number): number => Math.round(seconds / interval);

/**
 * A watch rule with its spans in whole grid steps.
 *
 * @throws RangeError when the horizon is not longer than the least lead in whole steps, or re-arm lies beyond the threshold
 */
export function steppedRule(rule: WatchRule, interval: number): SteppedRule {
  const sign = rule.direction === 'falling' ? -1 : 1;
  const stepped: SteppedRule = {
    interval,
    sign,
    threshold: sign * rule.threshold,
    rearm: sign * rule.rearm,
    onDelay: toSteps(rule.onDelay, interval),
    holdOff: toSteps(rule.holdOff, interval),
    leastLead: toSteps(rule.leastLead, interval),
    horizon: toSteps(rule.horizon, interval),
  };
  if (stepped.horizon <= stepped.leastLead) {
    throw new RangeError(
      `the horizon (${rule.horizon} s) must be at least one interval (${interval} s) longer than the least lead ` +
        `(${rule.leastLead} s); lengthen the horizon or shorten the least lead`,
    );
  }
  if (stepped.rearm > stepped.threshold) {
    throw new RangeError(
      `re-arm (${rule.rearm}) lies beyond the threshold (${rule.threshold}), so the rule could warn without pause; ` +
        `use 0.8 times the threshold, say`,
    );
  }
  return stepped;
}

/** Re-arm 0.8 × threshold and hold-off = horizon − least lead, unless said otherwise. */
export function watchRuleWithDefaults(
  rule: Omit<WatchRule, 'rearm' | 'onDelay' | 'holdOff' | 'direction'> & Partial<WatchRule>,
): WatchRule {
  return {
    variable: rule.variable,
    direction: rule.direction ?? 'rising',
    threshold: rule.threshold,
    rearm: rule.rearm ?? defaultRearm(rule.threshold, rule.direction ?? 'rising'),
    onDelay: rule.onDelay ?? 0,
    holdOff: rule.holdOff ?? rule.horizon - rule.leastLead,
    leastLead: rule.leastLead,
    horizon: rule.horizon,
  };
}

/** 0.8 × threshold where that lies on the quiet side of it, else a fifth of its size away. */
function defaultRearm(threshold: number, direction: 'rising' | 'falling'): number {
  const away = 0.2 * Math.abs(threshold);
  return direction === 'rising' ? threshold - away : threshold + away;
}

export const createWatchRuleState = (): WatchRuleState => ({
  armed: true,
  above: 0,
  lastWarning: Number.NEGATIVE_INFINITY,
});

/** A gap resets the on-delay and nothing else. */
export function breakWatchRule(state: WatchRuleState): void {
  state.above = 0;
}

/**
 * One grid step of the watched variable, at grid time `time` (seconds); true when a warning is issued.
 *
 * Armed, the variable above its threshold for on-delay + 1 consecutive steps: a rise, which disarms. It is a warning
 * unless hold-off has not passed since the last one; then it is passed over. Armed again once below re-arm.
 */
export function stepWatchRule(
  state: WatchRuleState,
  rule: SteppedRule,
  time: number,
  value: number,
): boolean {
  const s = rule.sign * value;
  if (!state.armed) {
    if (s < rule.rearm) {
      state.armed = true;
      state.above = 0;
    }
    return false;
  }
  state.above = s > rule.threshold ? state.above + 1 : 0;
  if (state.above <= rule.onDelay) return false;
  state.armed = false;
  state.above = 0;
  if (toSteps(time - state.lastWarning, rule.interval) < rule.holdOff) return false;
  state.lastWarning = time;
  return true;
}
