import type { Contender } from '../../shared-types/rehearsal.ts';
import { steppedRule } from '../watch/watchRule.ts';
import { type Blocks, blocksOf, joinBlocks } from './difference.ts';
import { isBlind } from './tally.ts';
import { type OperatingPoint, type Tried, tryWarner, warnerOf } from './threshold.ts';
import { type Ground, sweep, type Tuned, thresholdsOf, triedOn } from './tune.ts';

/** How a tuned signal does on the judged part. */
export interface Verdictable {
  tuned: Tuned;
  point: OperatingPoint | null;
  curve: Contender['curve'];
  /** what it did from switch to switch */
  blocks: Blocks;
  /** seconds */
  medianLead: number | null;
}

/** Judges a signal with the rule that it was tuned to; the curve has a point a threshold, its own among them. */
export function judgeTuned(ground: Ground, tuned: Tuned, points = 48): Verdictable {
  const { signal, manner } = tuned;
  const tried = triedOn(ground, signal);
  const { rule } = tuned.point;
  const { interval } = ground.spans;
  const point = tryWarner(tried, warnerOf(steppedRule(rule, interval)), rule, interval);
  // the scratch space of each stretch now holds this rule's warnings and what they cover
  const blocks = joinBlocks(
    tried.map(({ steps, warnings, size, cover }) => blocksOf(steps, warnings, size, cover)),
  );
  const leads = tried.flatMap((one) => leadsOf(one, interval)).sort((a, b) => a - b);
  // last, for it takes the scratch space; with the point itself, which need not be one of the thresholds
  const thresholds = new Set([...thresholdsOf(signal, tried, points), rule.threshold]);
  const sign = signal.direction === 'falling' ? -1 : 1;
  const ascending = [...thresholds].sort((a, b) => sign * (a - b));
  const curve = sweep(ground, tried, signal, manner, ascending).map(toCurve);
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

/** Leads, in seconds, of the scored switches that were warned of. */
function leadsOf({ steps, warnings, cover }: Tried, interval: number): number[] {
  const { switches, scoredFrom } = steps;
  const counts = [...switches.keys()].filter(
    (i) => switches[i]! >= scoredFrom && cover[i] !== -1 && !isBlind(steps, switches[i]!),
  );
  return counts.map((i) => (switches[i]! - warnings[cover[i]!]!) * interval);
}
