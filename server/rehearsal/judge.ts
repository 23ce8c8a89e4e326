import type { Contender } from '../../shared-types/rehearsal.ts';
import { steppedRule } from '../watch/watchRule.ts';
import type { Judged } from './difference.ts';
import { isBlind, spannedWithin, watchedWithin } from './tally.ts';
import { type OperatingPoint, type Tried, tryWarner, warnerOf } from './threshold.ts';
import { type Ground, sweep, type Tuned, thresholdsOf, triedOn } from './tune.ts';

/** How a tuned signal does on the judged part. */
export interface Verdictable {
  tuned: Tuned;
  point: OperatingPoint | null;
  curve: Contender['curve'];
  /** the judged part cut after every scored switch, and at the end of each recording */
  blocks: Block[];
  /** seconds */
  medianLead: number | null;
}

/** The time since the switch before, and what became of the switch that ends it; null: none does, or it was blind. */
export interface Block {
  warned: boolean | null;
  /** seconds; null where it was not warned */
  lead: number | null;
  /** steps, see `Judged` */
  watched: number;
  spanned: number;
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
  const blocks = tried.flatMap((one) => blocksOf(one, interval));
  const leads = blocks.flatMap(({ lead }) => (lead === null ? [] : [lead])).sort((a, b) => a - b);
  return {
    tuned,
    point,
    curve,
    blocks,
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

function blocksOf({ steps, warnings, size, cover }: Tried, interval: number): Block[] {
  const blocks: Block[] = [];
  let from = steps.scoredFrom;
  const cut = (to: number, warned: boolean | null, lead: number | null) => {
    blocks.push({
      warned,
      lead,
      watched: watchedWithin(steps, from, to),
      spanned: spannedWithin(steps, warnings, size, from, to),
    });
    from = to;
  };
  steps.switches.forEach((e, i) => {
    if (e < steps.scoredFrom) return;
    const warned = isBlind(steps, e) ? null : cover[i] !== -1;
    cut(e + 1, warned, warned === true ? (e - warnings[cover[i]!]!) * interval : null);
  });
  cut(steps.count, null, null);
  return blocks;
}

/**
 * Two warners' blocks as events that can be drawn. Only events that neither was blind to count; the time of any other
 * block is added to the next event's, that after the last event to the last's.
 */
export function eventsOf(ours: readonly Block[], theirs: readonly Block[]): [Judged, Judged] {
  const counts = ours.map(({ warned }, i) => warned !== null && theirs[i]!.warned !== null);
  return [gathered(ours, counts), gathered(theirs, counts)];
}

function gathered(blocks: readonly Block[], counts: readonly boolean[]): Judged {
  const events = counts.filter((one) => one).length;
  const judged = {
    warned: new Uint8Array(events),
    watched: new Int32Array(events),
    spanned: new Int32Array(events),
  };
  let event = 0;
  blocks.forEach(({ warned, watched, spanned }, i) => {
    const at = Math.min(event, events - 1);
    judged.watched[at]! += watched;
    judged.spanned[at]! += spanned;
    if (!counts[i]) return;
    judged.warned[at] = Number(warned);
    event++;
  });
  return judged;
}
