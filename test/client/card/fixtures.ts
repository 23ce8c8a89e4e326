import type { SwitchCard } from '../../../shared-types/rehearsal.ts';

/** A warned switch of "Loop A" at 12:00:30 UTC with thirty seconds before it. */
export function card(changes: Partial<SwitchCard> = {}): SwitchCard {
  const at = 1_700_049_630;
  const seconds = Array.from({ length: 81 }, (_, i) => (i - 60) / 2);
  return {
    channel: 'Loop A',
    at,
    outcome: 'warned',
    warnedAt: at - 8,
    lead: 8,
    leastLead: 4,
    horizon: 10,
    threshold: 1.7,
    variable: 'forcing',
    t: Float64Array.from(seconds, (second) => at + second),
    signal: Float64Array.from(seconds, (second) => Math.sin(second / 4)),
    value: Float64Array.from(seconds, (second) => 2 * Math.exp(-((second + 7) ** 2) / 10)),
    catching: { threshold: 1.9, falsePerHour: 0.84, cameTrue: 0.61 },
    ...changes,
  };
}
