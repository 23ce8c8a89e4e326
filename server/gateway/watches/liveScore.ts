import type { Score } from '../../../shared-types/score.ts';
import type { SwitchEvent, SwitchOutcome, Warning, WarningOutcome } from '../../../shared-types/warning.ts';
import { randomMedianLead } from '../../rehearsal/chance.ts';
import { garwoodInterval, wilsonInterval } from '../../rehearsal/intervals.ts';

/** What a watch said and what came of it, counted. Plain counts; `leads` ascending, seconds. */
export interface Tally {
  warnings: Record<WarningOutcome, number>;
  switches: Record<SwitchOutcome, number>;
  leads: number[];
}

export function createTally(): Tally {
  return {
    warnings: { open: 0, true: 0, repeat: 0, late: 0, false: 0, unseen: 0, acted: 0 },
    switches: { pending: 0, warned: 0, late: 0, missed: 0, blind: 0 },
    leads: [],
  };
}

/** Counts a warning, or takes it out again before its outcome changes (`by` = -1). */
export function tallyWarning(tally: Tally, warning: Warning, by: 1 | -1): void {
  tally.warnings[warning.outcome] += by;
}

export function tallySwitch(tally: Tally, event: SwitchEvent): void {
  tally.switches[event.outcome]++;
  if (event.lead === null) return;
  let place = tally.leads.length;
  while (place > 0 && tally.leads[place - 1]! > event.lead) place--;
  tally.leads.splice(place, 0, event.lead);
}

function quantile(sorted: readonly number[], share: number): number | null {
  if (sorted.length === 0) return null;
  const place = share * (sorted.length - 1);
  const below = Math.floor(place);
  const above = Math.min(sorted.length - 1, below + 1);
  return sorted[below]! + (place - below) * (sorted[above]! - sorted[below]!);
}

/** Seconds a watch had a full window, those inside a span, and its rule's spans. */
export interface Watched {
  seconds: number;
  covered: number;
  interval: number;
  leastLead: number;
  horizon: number;
}

/**
 * The live grade, by the definitions of rehearsal; without p-value and skill share, which need the whole record.
 *
 * @param tally of warnings and switches since the grade began
 */
export function liveScore(tally: Tally, watched: Watched): Score {
  const { open, unseen, acted, repeat } = tally.warnings;
  const { pending, warned, late, missed, blind } = tally.switches;
  const settled = tally.warnings.true + tally.warnings.late + tally.warnings.false;
  const issued = settled + open + unseen + acted + repeat;
  const counted = warned + late + missed;
  const tau = watched.seconds === 0 ? 0 : watched.covered / watched.seconds;
  const steps = (seconds: number) => Math.round(seconds / watched.interval);
  const random = randomMedianLead(
    issued,
    steps(watched.seconds),
    steps(watched.leastLead),
    steps(watched.horizon),
  );
  return {
    switches: { total: counted + blind + pending, warned, late, missed, blind },
    warnings: { ...tally.warnings, total: issued },
    detection: wilsonInterval(warned, counted),
    cameTrue: wilsonInterval(tally.warnings.true, settled),
    falseRatio: wilsonInterval(tally.warnings.false, settled),
    falsePerHour: garwoodInterval(tally.warnings.false, watched.seconds / 3600),
    lead: {
      median: quantile(tally.leads, 0.5),
      p10: quantile(tally.leads, 0.1),
      p90: quantile(tally.leads, 0.9),
      random: random === null ? null : random * watched.interval,
    },
    tau,
    skill: counted === 0 ? null : warned / counted - tau,
    skillShare: null,
    pValue: null,
    watchedSeconds: watched.seconds,
  };
}
