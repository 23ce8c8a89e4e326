import type { RegimeRule } from '../../shared-types/watch.ts';
import { toSteps } from './watchRule.ts';

/**
 * Remembers where a regime rule stands on the grid of its channel. Plain data: a snapshot is a copy of it.
 * Regimes are numbered 0, 1, … from the lowest band up; one-sided rules know 0 (quiet) and 1 (active).
 */
export interface RegimeState {
  /** the confirmed regime; −1 before the first is known and after a gap */
  regime: number;
  /** grid time of the newest step; NaN before the first */
  time: number;
  previous: number;
  /** time of the last crossing of each parting level; NaN: none in this run */
  crossed: number[];
  /** one-sided rules: below re-arm since the last excursion; time at which that ended */
  armed: boolean;
  endedAt: number;
  /** burst: the squares of the last window in a ring, their sum, how many there are and where the next one goes */
  squares: Float64Array;
  sum: number;
  filled: number;
  next: number;
}

/** A confirmed switch. Times are grid times in seconds. */
export interface ConfirmedSwitch {
  at: number;
  confirmedAt: number;
  from: number;
  to: number;
}

/** A regime rule readied for a grid. */
export interface SteppedRegime {
  rule: RegimeRule;
  interval: number;
  /** parting levels ascending; far[i] = the values beyond which the lower and upper side of level i are confirmed */
  levels: number[];
  below: number[];
  beyond: number[];
  /** burst: steps in the window */
  window: number;
}

/**
 * Readies a regime rule for a grid of `interval` seconds.
 *
 * @throws RangeError in a sentence when the rule contradicts itself (LOW not below HIGH, re-arm beyond the level, …)
 */
export function steppedRegime(rule: RegimeRule, interval: number): SteppedRegime {
  const stepped: SteppedRegime = { rule, interval, levels: [], below: [], beyond: [], window: 0 };
  if (rule.kind === 'sides') {
    if (!(rule.low < rule.high))
      throw new RangeError(`sides:${rule.low},${rule.high} — LOW must be below HIGH; swap them`);
    stepped.levels = [(rule.low + rule.high) / 2];
    stepped.below = [rule.low];
    stepped.beyond = [rule.high];
  } else if (rule.kind === 'levels') {
    for (let i = 1; i < rule.levels.length; i++) {
      if (!(rule.levels[i - 1]! + rule.deadband < rule.levels[i]!)) {
        throw new RangeError(
          `levels ${rule.levels.join(', ')} with deadband ${rule.deadband}: levels must ascend by more than the deadband; ` +
            `sort them or lower the deadband`,
        );
      }
    }
    stepped.levels = rule.levels;
    stepped.below = rule.levels.map((level) => level - rule.deadband / 2);
    stepped.beyond = rule.levels.map((level) => level + rule.deadband / 2);
  } else if (rule.kind === 'burst') {
    stepped.window = Math.max(1, toSteps(rule.window, interval));
    checkRearm('burst', rule.level, rule.rearm);
  } else if (rule.kind === 'excursion') checkRearm('excursion', rule.level, rule.rearm);
  else if (rule.kind === 'dip') checkRearm('dip', -rule.level, -rule.rearm);
  return stepped;
}

function checkRearm(kind: string, level: number, rearm: number): void {
  if (rearm <= level) return;
  throw new RangeError(
    `${kind}: REARM ${Math.abs(rearm)} lies beyond LEVEL ${Math.abs(level)}; it must be on the quiet side of the level`,
  );
}

export function createRegimeState(regime: SteppedRegime): RegimeState {
  return {
    regime: -1,
    time: Number.NaN,
    previous: Number.NaN,
    crossed: regime.levels.map(() => Number.NaN),
    armed: false,
    endedAt: Number.NEGATIVE_INFINITY,
    squares: new Float64Array(regime.window),
    sum: 0,
    filled: 0,
    next: 0,
  };
}

/** A gap in the channel: what regime it is in has to be seen anew, and no switch is stamped across it. */
export function breakRegime(state: RegimeState): void {
  state.regime = -1;
  state.previous = Number.NaN;
  state.crossed.fill(Number.NaN);
  state.armed = false;
  state.endedAt = Number.NEGATIVE_INFINITY;
  state.sum = 0;
  state.filled = 0;
  state.next = 0;
}

/**
 * One grid step of the regime channel.
 *
 * @param time  grid time, seconds
 * @param value channel value, its own unit
 * @returns the switch that this step confirms, or null
 */
export function stepRegime(
  state: RegimeState,
  regime: SteppedRegime,
  time: number,
  value: number,
): ConfirmedSwitch | null {
  state.time = time;
  const { rule } = regime;
  let found: ConfirmedSwitch | null;
  if (rule.kind === 'sides' || rule.kind === 'levels') found = stepBands(state, regime, time, value);
  else if (rule.kind === 'excursion')
    found = stepExcursion(state, time, value, rule.level, rule.rearm, rule.gap);
  else if (rule.kind === 'dip')
    found = stepExcursion(state, time, -value, -rule.level, -rule.rearm, rule.gap);
  else if (rule.kind === 'burst') found = stepBurst(state, regime, time, value, rule.level, rule.rearm);
  else found = stepMarks(state, time, value);
  state.previous = value;
  if (found === null || rule.to === undefined || (rule.kind !== 'sides' && rule.kind !== 'levels'))
    return found;
  return found.to > found.from === (rule.to === 'up') ? found : null;
}

/** Two or more bands: the last crossing of the parting level next to the band that was reached. */
function stepBands(
  state: RegimeState,
  regime: SteppedRegime,
  time: number,
  value: number,
): ConfirmedSwitch | null {
  const { levels, below, beyond } = regime;
  for (let i = 0; i < levels.length; i++) {
    const level = levels[i]!;
    if (value >= level !== state.previous >= level && !Number.isNaN(state.previous)) state.crossed[i] = time;
  }
  const from = state.regime;
  if (from === -1) {
    state.regime = bandOf(value, below, beyond);
    return null;
  }
  let to = from;
  while (to < levels.length && value > beyond[to]!) to++;
  if (to === from) while (to > 0 && value < below[to - 1]!) to--;
  if (to === from) return null;
  state.regime = to;
  return { at: state.crossed[to > from ? to - 1 : to]!, confirmedAt: time, from, to };
}

/** The band a value lies in for certain, −1 in a deadband. */
function bandOf(value: number, below: readonly number[], beyond: readonly number[]): number {
  for (let band = 0; band <= below.length; band++) {
    const aboveLower = band === 0 || value > beyond[band - 1]!;
    const belowUpper = band === below.length || value < below[band]!;
    if (aboveLower && belowUpper) return band;
  }
  return -1;
}

function stepExcursion(
  state: RegimeState,
  time: number,
  value: number,
  level: number,
  rearm: number,
  gap: number,
): ConfirmedSwitch | null {
  if (value < rearm && !state.armed) {
    if (state.regime === 1) state.endedAt = time;
    state.armed = true;
    state.regime = 0;
  }
  if (!state.armed || !(value > level)) return null;
  state.armed = false;
  state.regime = 1;
  return time - state.endedAt <= gap ? null : { at: time, confirmedAt: time, from: 0, to: 1 };
}

function stepBurst(
  state: RegimeState,
  regime: SteppedRegime,
  time: number,
  value: number,
  level: number,
  rearm: number,
): ConfirmedSwitch | null {
  const { window, interval } = regime;
  const square = value * value;
  state.sum += square - (state.filled === window ? state.squares[state.next]! : 0);
  state.squares[state.next] = square;
  state.next++;
  if (state.filled < window) state.filled++;
  if (state.next === window) {
    state.next = 0;
    // summed afresh once a window, or rounding would pile up without end
    state.sum = 0;
    for (let i = 0; i < window; i++) state.sum += state.squares[i]!;
  }
  if (state.filled < window) return null;
  const rms = Math.sqrt(Math.max(0, state.sum) / window);
  if (rms < rearm && !state.armed) {
    state.armed = true;
    state.regime = 0;
  }
  if (!state.armed || !(rms > level)) return null;
  state.armed = false;
  state.regime = 1;
  return { at: time - (window - 1) * interval, confirmedAt: time, from: 0, to: 1 };
}

function stepMarks(state: RegimeState, time: number, value: number): ConfirmedSwitch | null {
  const from = state.regime;
  state.regime = value === 0 ? 0 : 1;
  return from === 0 && state.regime === 1 ? { at: time, confirmedAt: time, from: 0, to: 1 } : null;
}

/**
 * No switch will any more be stamped at or before this time (seconds): what a warning's grade may wait for. NaN
 * before the first step.
 */
export function settledUntil(state: RegimeState, regime: SteppedRegime): number {
  const { rule, interval } = regime;
  if (rule.kind === 'burst') return state.time - (regime.window - 1) * interval;
  if (rule.kind !== 'sides' && rule.kind !== 'levels') return state.time;
  const { levels } = regime;
  let settled = state.time;
  for (let i = 0; i < levels.length && state.regime !== -1; i++) {
    const wasAbove = state.regime > i;
    if (state.previous >= levels[i]! !== wasAbove) settled = Math.min(settled, state.crossed[i]! - interval);
  }
  return settled;
}
