import type { Contender } from '../../shared-types/rehearsal.ts';
import { steppedRule } from '../watch/watchRule.ts';
import { isBlind } from './tally.ts';
import { type OperatingPoint, type Tried, tryWarner, warnerOf } from './threshold.ts';
import { type Ground, sweep, type Tuned, thresholdsOf, triedOn } from './tune.ts';

/** How a tuned signal does on the judged part. */
export interface Verdictable {
  tuned: Tuned;
  point: OperatingPoint | null;
  curve: Contender['curve'];
  /** of every scored switch of the judged part, in order: 1 warned, 0 not; and whether it was blind */
  warned: Uint8Array;
  blind: Uint8Array;
  /** seconds */
  medianLead: number | null;
}

/** Judges a signal with the rule that it was tuned to; the curve has as many points as there are thresholds. */
export function judgeTuned(ground: Ground, tuned: Tuned, points = 48): Verdictable {
  const { signal, manner } = tuned;
  const tried = triedOn(ground, signal);
  const curve = sweep(ground, tried, signal, manner, thresholdsOf(signal, tried, points)).map(toCurve);
  const { rule } = tuned.point;
  const { interval } = ground.spans;
  const point = tryWarner(tried, warnerOf(steppedRule(rule, interval)), rule, interval);
  // the scratch space of each stretch now holds this rule's warnings and what they cover
  const events = tried.flatMap((one) => eventsOf(one, interval));
  const leads = events.flatMap(({ lead }) => (lead === null ? [] : [lead])).sort((a, b) => a - b);
  return {
    tuned,
    point,
    curve,
    warned: Uint8Array.from(events, ({ warned }) => Number(warned)),
    blind: Uint8Array.from(events, ({ blind }) => Number(blind)),
    medianLead: leads.length === 0 ? null : leads[leads.length >> 1]!,
  };
}

const toCurve = ({ rule, falsePerHour, detection, skill, cameTrue }: OperatingPoint) => ({
  threshold: rule.threshold,
  falsePerHour,
  detection,
  skill,
  cameTrue,
});

function eventsOf({ steps, warnings, cover }: Tried, interval: number) {
  const events: { warned: boolean; blind: boolean; lead: number | null }[] = [];
  steps.switches.forEach((e, i) => {
    if (e < steps.scoredFrom) return;
    const blind = isBlind(steps, e);
    const warned = !blind && cover[i] !== -1;
    events.push({ warned, blind, lead: warned ? (e - warnings[cover[i]!]!) * interval : null });
  });
  return events;
}
