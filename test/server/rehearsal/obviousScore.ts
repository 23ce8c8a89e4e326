import type { Score } from '../../../shared-types/score.ts';

/** A recording as plain flags per grid step, for the slow and obvious way of scoring. */
export interface ObviousCase {
  leastLead: number;
  horizon: number;
  /** per step: full window; regime channel seen */
  watched: boolean[];
  seen: boolean[];
  switches: number[];
  warnings: number[];
  scoredFrom: number;
}

type Counts = Pick<Score, 'switches' | 'warnings'> & { tau: number; skill: number | null; leads: number[] };

/** The scoring rules read out sentence by sentence, every pair looked at, nothing clever. */
export function obviousScore(given: ObviousCase): Counts {
  const { leastLead: M, horizon: H, watched, seen, switches, warnings, scoredFrom } = given;
  const covers = (a: number, e: number) => M < e - a && e - a <= H;
  const precedes = (a: number, e: number) => 0 <= e - a && e - a <= M;
  const counts: Counts = {
    switches: { total: 0, warned: 0, late: 0, missed: 0, blind: 0 },
    warnings: { total: 0, true: 0, repeat: 0, late: 0, false: 0, open: 0, unseen: 0, acted: 0 },
    tau: 0,
    skill: null,
    leads: [],
  };
  for (const e of switches.filter((step) => step >= scoredFrom)) {
    counts.switches.total++;
    const couldWarn = watched.some((full, step) => full && e - H <= step && step < e - M);
    if (!couldWarn) counts.switches.blind++;
    else if (warnings.some((a) => covers(a, e))) {
      counts.switches.warned++;
      counts.leads.push(e - warnings.find((a) => covers(a, e))!);
    } else if (warnings.some((a) => precedes(a, e))) counts.switches.late++;
    else counts.switches.missed++;
  }
  for (const a of warnings.filter((step) => step >= scoredFrom)) {
    counts.warnings.total++;
    const earlier = warnings.filter((b) => b < a);
    const warnedAlready = (e: number) => earlier.some((b) => covers(b, e));
    const near = switches.filter((e) => covers(a, e) || precedes(a, e));
    // nothing is known of the time between two samples when one of them is missing
    const gap = seen.some(
      (sees, step) => (!sees || seen[step - 1] === false) && a + M < step && step <= a + H,
    );
    if (near.some((e) => covers(a, e) && !warnedAlready(e))) counts.warnings.true++;
    else if (near.length > 0 && near.every(warnedAlready)) counts.warnings.repeat++;
    else if (switches.some((e) => precedes(a, e))) counts.warnings.late++;
    else if (gap) counts.warnings.unseen++;
    else if (watched.length - 1 < a + H) counts.warnings.open++;
    else counts.warnings.false++;
  }
  const scored = watched.map((full, step) => full && step >= scoredFrom);
  const inside = scored.filter((counted, step) => counted && warnings.some((a) => covers(a, step))).length;
  const all = scored.filter(Boolean).length;
  counts.tau = all === 0 ? 0 : inside / all;
  const total = counts.switches.warned + counts.switches.late + counts.switches.missed;
  counts.skill = total === 0 ? null : counts.switches.warned / total - counts.tau;
  return counts;
}

/** The perfect warner by the same rules. */
export function obviousPerfect(given: ObviousCase): ObviousCase {
  const { leastLead: M, horizon: H, watched, switches } = given;
  const warnings: number[] = [];
  for (const e of switches) {
    const couldWarn = watched.some((full, step) => full && e - H <= step && step < e - M);
    if (couldWarn && !warnings.some((a) => M < e - a && e - a <= H)) warnings.push(e - M - 1);
  }
  return { ...given, warnings };
}
