import type { ActedOn, SwitchEvent, Warning } from '../../../shared-types/warning.ts';
import type { Happening } from '../../watch/types.ts';
import { createTally, type Tally, tallySwitch, tallyWarning } from './liveScore.ts';

/** A watch's warnings and switches: what was told, so that a replay does not tell it again, and what became of it. */
export interface WatchBook {
  /** counts since the grade began; and as people had it, see `hearing` */
  readonly tally: Tally;
  readonly heard: Tally;
  /** the warning issued at a channel time */
  warningAt(at: number): Warning | undefined;
  warning(id: number): Warning | undefined;
  /** notes a new warning; false: it was told before */
  issue(warning: Warning): boolean;
  /** gives a warning its outcome; null: it had one, or is not known any more */
  settle(graded: Extract<Happening, { kind: 'graded' }>): Warning | null;
  /** marks warnings up to an id as acknowledged; those that were not before */
  acknowledge(upTo: number, time: number, by: string): Warning[];
  /** says that a warning was acted on, or takes it back; null: nothing changed */
  act(id: number, said: ActedOn, time: number): Warning | null;
  /** notes a switch; false: it was told before */
  meet(event: SwitchEvent): boolean;
  /** channel time up to which some open warning speaks; −Infinity: none is open */
  openUntil(): number;
  /** what was counted is forgotten: the grade begins anew */
  beginAnew(): void;
}

/** Warnings kept in memory, to be known again in a replay and to be settled. */
const WARNINGS_KEPT = 2000;

/** Times from here on are Unix time, below it elapsed time. */
const UNIX_FROM = 1e8;

/**
 * Creates a book of what the store knows, oldest first.
 *
 * @param spans   of the watch rule, seconds; null: it has none
 * @param beganAt server clock, Unix seconds: what bears an earlier time nobody could have been warned of; null: all counts
 */
export function createWatchBook(
  known: { warnings: Warning[]; switches: SwitchEvent[] },
  spans: { leastLead: number; horizon: number; interval: number } | null = null,
  beganAt: number | null = null,
): WatchBook {
  const warnings = new Map<number, Warning>();
  const open = new Set<Warning>();
  const switchesToldAt = new Set<number>();
  let tally = createTally();
  let heard = createTally();

  /** Whether anybody could have heard: not of what was recorded before the watch began. */
  const countsFor = (at: number) => beganAt === null || at < UNIX_FROM || at >= beganAt;
  const count = (warning: Warning, by: 1 | -1) => {
    tallyWarning(tally, warning, by);
    if (!warning.quiet && countsFor(warning.at)) tallyWarning(heard, warning, by);
  };
  /** A switch as people had it: warned only by a warning that was made in time to speak. */
  const asHeard = (event: SwitchEvent): SwitchEvent => {
    if (spans === null || event.outcome !== 'warned') return event;
    const { leastLead, horizon, interval } = spans;
    const steps = (seconds: number) => Math.round(seconds / interval);
    const before = (warning: Warning) => steps(event.at - warning.at);
    for (const warning of warnings.values()) {
      if (warning.quiet || before(warning) <= steps(leastLead) || before(warning) > steps(horizon)) continue;
      return { ...event, lead: event.at - warning.at };
    }
    return { ...event, outcome: 'late', lead: null };
  };
  const note = (warning: Warning) => {
    warnings.set(warning.at, warning);
    if (warning.outcome === 'open') open.add(warning);
    count(warning, 1);
    if (warnings.size <= WARNINGS_KEPT) return;
    const oldest = warnings.values().next().value!;
    warnings.delete(oldest.at);
    open.delete(oldest);
  };
  const changed = (warning: Warning, change: () => void): Warning => {
    count(warning, -1);
    change();
    count(warning, 1);
    if (warning.outcome === 'open') open.add(warning);
    else open.delete(warning);
    return warning;
  };
  const meet = (event: SwitchEvent) => {
    switchesToldAt.add(event.at);
    tallySwitch(tally, event);
    if (countsFor(event.at)) tallySwitch(heard, asHeard(event));
  };
  for (const warning of known.warnings) note(warning);
  for (const event of known.switches) meet(event);

  const byId = (id: number) => {
    for (const warning of warnings.values()) if (warning.id === id) return warning;
    return undefined;
  };
  return {
    get tally() {
      return tally;
    },
    get heard() {
      return heard;
    },
    warningAt: (at) => warnings.get(at),
    warning: byId,
    issue(warning) {
      if (warnings.has(warning.at)) return false;
      note(warning);
      return true;
    },
    settle({ at, outcome, switchAt, lead }) {
      const warning = warnings.get(at);
      const before = warning?.acted?.outcome ?? warning?.outcome;
      if (warning === undefined || before !== 'open') return null;
      return changed(warning, () => {
        warning.switchAt = switchAt;
        warning.lead = lead;
        if (warning.acted) warning.acted = { ...warning.acted, outcome };
        else warning.outcome = outcome;
      });
    },
    acknowledge(upTo, time, by) {
      const covered = [...warnings.values()].filter((one) => one.acknowledgedAt === null && one.id <= upTo);
      for (const warning of covered) {
        warning.acknowledgedAt = time;
        warning.acknowledgedBy = by;
      }
      return covered;
    },
    act(id, { acted, by, text }, time) {
      const warning = byId(id);
      if (warning === undefined || acted === (warning.outcome === 'acted')) return null;
      return changed(warning, () => {
        const { outcome } = warning;
        if (outcome === 'acted') {
          warning.outcome = warning.acted!.outcome;
          warning.acted = null;
        } else {
          warning.acted = { at: time, by, text, outcome };
          warning.outcome = 'acted';
        }
      });
    },
    meet(event) {
      if (switchesToldAt.has(event.at)) return false;
      meet(event);
      return true;
    },
    openUntil() {
      let end = Number.NEGATIVE_INFINITY;
      for (const { to } of open) end = Math.max(end, to);
      return end;
    },
    beginAnew() {
      tally = createTally();
      heard = createTally();
    },
  };
}
