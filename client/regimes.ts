import type { SwitchEvent } from '../shared-types/warning.ts';

/** A stretch of channel time (s). */
export interface Stretch {
  from: number;
  to: number;
}

/**
 * Stretches of [from, to] spent in the second regime (of several regimes: in every second one). Where the switches
 * contradict each other, as they do under rules that see one direction only, the regime counts as unknown.
 *
 * @param switches  ascending in time
 * @param regimeNow the regime at `to`; null: not known
 * @param since     before this nothing is known of regimes
 */
export function secondRegime(
  switches: readonly Pick<SwitchEvent, 'at' | 'from' | 'to'>[],
  from: number,
  to: number,
  regimeNow: number | null,
  since = Number.NEGATIVE_INFINITY,
): Stretch[] {
  const stretches: Stretch[] = [];
  const begin = Math.max(from, since);
  const add = (regime: number, start: number, end: number) => {
    if (regime % 2 === 1 && end > from && start < to)
      stretches.push({ from: Math.max(start, from), to: Math.min(end, to) });
  };
  if (switches.length === 0) {
    if (regimeNow !== null) add(regimeNow, begin, to);
    return stretches;
  }
  add(switches[0]!.from, begin, switches[0]!.at);
  for (let i = 0; i < switches.length; i++) {
    const { at, to: regime } = switches[i]!;
    const next = switches[i + 1];
    if (next !== undefined && next.from === regime) add(regime, at, next.at);
    if (next === undefined && (regimeNow === null || regimeNow === regime)) add(regime, at, to);
  }
  return stretches;
}
