import type { RehearsalRequest } from '../../shared-types/rehearsal.ts';
import type { Variable, WatchRule } from '../../shared-types/watch.ts';
import { toSteps } from '../watch/watchRule.ts';

/** What a rule has besides its threshold. Spans are seconds. */
export interface Manner {
  /** where it is armed again: at a share of the threshold, at a distance from it, or at a fixed level */
  rearm: { kind: 'share' | 'distance' | 'level'; by: number };
  onDelay: number;
  holdOff: number;
}

/** Rule spans and what is held fixed; the rest is searched. */
export type Asked = Pick<RehearsalRequest, 'leastLead' | 'horizon' | 'rearm' | 'onDelay' | 'holdOff'>;

/** Shares of the threshold, and distances from it in standard deviations of the variable; the usual one first. */
const REARM_SHARES = [0.8, 0.5, 0.95];
const REARM_DISTANCES = [0.25, 0.1, 1];

/**
 * The manners to try, the usual one first. A share of the threshold makes sense where quiet is zero, as for the
 * forcing; elsewhere re-arm keeps a distance.
 *
 * @param spread standard deviation of the variable, in its unit; null: quiet is zero
 */
export function mannersOf(asked: Asked, spread: number | null, interval: number): Manner[] {
  const rearms: Manner['rearm'][] =
    asked.rearm !== null
      ? [{ kind: 'level', by: asked.rearm }]
      : spread === null
        ? REARM_SHARES.map((by) => ({ kind: 'share', by }))
        : REARM_DISTANCES.map((by) => ({ kind: 'distance', by: by * spread }));
  const room = asked.horizon - asked.leastLead;
  const onDelays = asked.onDelay !== null ? [asked.onDelay] : [0, room / 10];
  const holdOffs = asked.holdOff !== null ? [asked.holdOff] : [room, room / 2, asked.horizon];
  const manners = new Map<string, Manner>();
  for (const rearm of rearms) {
    for (const onDelay of onDelays.map((span) => toSteps(span, interval) * interval)) {
      for (const holdOff of holdOffs) {
        manners.set([rearm.by, onDelay, toSteps(holdOff, interval)].join(' '), { rearm, onDelay, holdOff });
      }
    }
  }
  return [...manners.values()];
}

/** The rule of a manner with a threshold; null where re-arm would lie beyond it. */
export function ruleOfManner(
  manner: Manner,
  { leastLead, horizon }: Pick<Asked, 'leastLead' | 'horizon'>,
  variable: Variable,
  direction: WatchRule['direction'],
  threshold: number,
): WatchRule | null {
  const sign = direction === 'falling' ? -1 : 1;
  const rearm = rearmOf(manner, sign, threshold);
  if (sign * rearm > sign * threshold) return null;
  const { onDelay, holdOff } = manner;
  return { variable, direction, threshold, rearm, onDelay, holdOff, leastLead, horizon };
}

function rearmOf({ rearm }: Manner, sign: 1 | -1, threshold: number): number {
  if (rearm.kind === 'level') return rearm.by;
  return rearm.kind === 'share' ? rearm.by * threshold : threshold - sign * rearm.by;
}
