import type { Model, OperatingPoint } from '../../shared-types/model.ts';
import { type OperatingTable, SWITCH_OUTCOMES, type SwitchCard } from '../../shared-types/rehearsal.ts';
import type { SwitchOutcome } from '../../shared-types/warning.ts';
import type { WatchRule } from '../../shared-types/watch.ts';
import { steppedRule, toSteps } from '../watch/watchRule.ts';
import { type GriddedRecording, gridChannels } from './gridded.ts';
import type { RecordedSeries } from './playback.ts';
import { type Trace, traceOf, warningsInto } from './trace.ts';

/** Horizons shown before and after a switch. */
const BEFORE = 3;
const AFTER = 1;

/** What a card is made of. Times are channel time in seconds. */
export interface CardTask {
  /** with its rule */
  model: Model;
  /** channels of the recording, one per channel of the model */
  channels: readonly string[];
  /** the samples around the switch; `cardRange` says from when to when */
  series: readonly RecordedSeries[];
  at: number;
  outcome: SwitchOutcome;
  warnedAt: number | null;
  lead: number | null;
  /** what other thresholds would have cost; left out: those of the model file */
  catching?: SwitchCard['catching'];
}

/** From when to when (seconds) samples are needed for a card of a switch at `at`, the filling of the window included. */
export function cardRange({ rule, delays, interval }: Model, at: number): { from: number; to: number } {
  const horizon = rule?.horizon ?? delays * interval;
  return { from: at - BEFORE * horizon - (delays + 2) * interval, to: at + AFTER * horizon };
}

/**
 * The last moments before a switch: signal and watched variable on the grid, from three horizons before to one after,
 * whether it was warned, and the strictest threshold that would have caught it with what that would have cost.
 *
 * @throws RangeError when the model has no rule
 */
export function cardOf(task: CardTask): SwitchCard {
  const { model, channels, series, at } = task;
  const { rule } = model;
  if (rule === null) {
    throw new RangeError(
      `the model ${model.name} has no watch rule, so nothing is watched; fit or rehearse it`,
    );
  }
  const { interval, gapIntervals } = model;
  const gridded = gridChannels(series, { channels, interval, gapIntervals });
  const trace = gridded === null ? null : traceOf(model, gridded, rule.variable);
  const shown = gridded === null ? empty() : shownOf(gridded, trace!, at, rule.horizon);
  const catching =
    task.catching !== undefined
      ? task.catching
      : trace === null
        ? null
        : catchingOf(model.operating ?? [], trace, rule, at, interval);
  return {
    channel: channels[0]!,
    at,
    outcome: task.outcome,
    warnedAt: task.warnedAt,
    lead: task.lead,
    leastLead: rule.leastLead,
    horizon: rule.horizon,
    threshold: rule.threshold,
    variable: rule.variable === 'forcing' ? 'forcing' : `level ${rule.direction}`,
    ...shown,
    catching,
  };
}

const empty = () => ({ t: new Float64Array(), signal: new Float64Array(), value: new Float64Array() });

function shownOf({ runs, interval }: GriddedRecording, { value }: Trace, at: number, horizon: number) {
  const t: number[] = [];
  const signal: number[] = [];
  const watched: number[] = [];
  for (const { start, firstStep, values, newest } of runs) {
    for (let i = 0; i < newest.length; i++) {
      const time = start + i * interval;
      if (time < at - BEFORE * horizon || time > at + AFTER * horizon) continue;
      t.push(time);
      signal.push(values[0]![i]!);
      watched.push(value[firstStep + i]!);
    }
  }
  return {
    t: Float64Array.from(t),
    signal: Float64Array.from(signal),
    value: Float64Array.from(watched),
  };
}

/**
 * The strictest of a model's operating points whose rule, begun armed at the start of the stretch, would have warned in
 * time.
 *
 * @param points in ascending strictness
 * @param at     the switch, seconds
 */
export function catchingOf(
  points: readonly OperatingPoint[],
  trace: Trace,
  rule: WatchRule,
  at: number,
  interval: number,
): SwitchCard['catching'] {
  const out = new Int32Array(trace.value.length);
  for (let row = points.length - 1; row >= 0; row--) {
    const { threshold, rearm, falsePerHour, cameTrue } = points[row]!;
    const stepped = steppedRule({ ...rule, threshold, rearm }, interval);
    const size = warningsInto(trace, trace.value.length, stepped, out);
    for (let i = 0; i < size; i++) {
      const steps = toSteps(at - trace.at[out[i]!]!, interval);
      if (steps > stepped.leastLead && steps <= stepped.horizon && falsePerHour !== null)
        return { threshold, falsePerHour, cameTrue };
    }
  }
  return null;
}

/** The strictest row of a rehearsal's table in which switch `index` was warned, and what it would have cost. */
export function catchingOfTable({ rows }: OperatingTable, index: number): SwitchCard['catching'] {
  const warned = SWITCH_OUTCOMES.indexOf('warned');
  for (let row = rows.length - 1; row >= 0; row--) {
    const { switches, threshold, score } = rows[row]!;
    if (switches[index] !== warned || score.falsePerHour.value === null) continue;
    return { threshold, falsePerHour: score.falsePerHour.value, cameTrue: score.cameTrue.value };
  }
  return null;
}
