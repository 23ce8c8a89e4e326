import type { Warning } from '../shared-types/warning.ts';
import type { WatchState } from '../shared-types/watch.ts';
import {
  aheadText,
  capital,
  clockText,
  counted,
  intervalText,
  minuteText,
  shareText,
  spanText,
} from './words.ts';

/** Where an open warning stands: its span ahead, begun, or over without a verdict yet. */
export type Phase = 'ahead' | 'begun' | 'over';

/** Where a warning's span stands at a moment of channel time. */
export function phaseOf(warning: Warning, now: number): Phase {
  return now < warning.from ? 'ahead' : now <= warning.to ? 'begun' : 'over';
}

/** Headline of an open warning: what is expected, and when as seen from now. */
export function headline(
  warning: Warning,
  watch: WatchState,
  now: number,
): { what: string; when: string; until: string } {
  const word = capital(watch.switchWord);
  const end = clockText(warning.to);
  switch (phaseOf(warning, now)) {
    case 'ahead':
      return {
        what: `${word} expected`,
        when: `in ${aheadText(warning.from - now, warning.to - now)}`,
        until: `from ${clockText(warning.from)} until ${end}`,
      };
    case 'begun':
      return {
        what: `${word} may happen`,
        when: 'at any moment',
        until: `until ${end}, ${spanText(Math.ceil(warning.to - now))} more`,
      };
    case 'over':
      return {
        what: `${word} was expected`,
        when: `until ${end}`,
        until: 'what became of it is not known yet',
      };
  }
}

/** "97 of 100 such warnings came true" and where that was seen, with its interval; null without a score. */
export function promiseText(watch: WatchState): { share: string; where: string } | null {
  const share = shareText(watch.promise?.cameTrue);
  if (share === null) return null;
  const interval = intervalText(watch.promise?.cameTrue);
  return {
    share: `${share} such warnings came true`,
    where: interval === null ? 'in rehearsal' : `in rehearsal, repeats apart (${interval})`,
  };
}

/** "of a usual lead of 16 s, 10 s are left for you"; null when no usual lead is known. */
export function leftText(warning: Warning, watch: WatchState, now: number): string | null {
  const usual = watch.promise?.lead.median ?? watch.grade?.lead.median ?? null;
  if (usual === null || phaseOf(warning, now) === 'over') return null;
  const left = warning.at + usual - now;
  if (left <= 0) return `the usual lead of ${spanText(usual)} is used up`;
  const rounded = usual >= 10 ? spanText(Math.round(usual)) : spanText(usual);
  return `of a usual lead of ${rounded}, ${spanText(usual >= 10 ? Math.round(left) : left)} are left for you`;
}

/** What rehearsal says about warnings that do not come: "in rehearsal 1 of 154 reversals came unwarned, 12 late". */
export function unwarnedText(watch: WatchState): string | null {
  const promised = watch.promise?.switches;
  if (promised === undefined) return null;
  const judged = promised.total - promised.blind;
  if (judged <= 0) return null;
  const late = promised.late > 0 ? `, ${promised.late} warned of too late` : '';
  return `in rehearsal ${promised.missed} of ${counted(judged, watch.switchWord)} came unwarned${late}`;
}

/** One sentence on how a watch has done live, beside what rehearsal promised. */
export function gradeSentence(watch: WatchState, name: string): string {
  const grade = watch.gradeAtDelivery;
  const judged = grade === null ? 0 : grade.switches.total - grade.switches.blind;
  if (grade === null || judged + grade.warnings.total === 0)
    return `${name} has met no ${watch.switchWord} and given no warning yet.`;
  const lead = grade.lead.median === null ? '' : `, median lead ${spanText(grade.lead.median)}`;
  const warned =
    judged === 0
      ? `met no ${watch.switchWord} yet`
      : `warned ${grade.switches.warned} of ${counted(judged, watch.switchWord)}${lead}`;
  const promised = watch.promise?.cameTrue.value;
  const said =
    promised === null || promised === undefined ? '' : ` (rehearsal said ${Math.round(promised * 100)} %)`;
  const { warnings } = grade;
  const settled = warnings.true + warnings.late + warnings.false;
  const repeats = warnings.repeat === 0 ? '' : `, beside ${counted(warnings.repeat, 'repeat')}`;
  return settled === 0
    ? `${name} ${warned}; no warning judged yet.`
    : `${name} ${warned}; ${warnings.true} of ${counted(settled, 'warning')} came true${said}${repeats}.`;
}

/** What became of a warning, in words. */
export function outcomeText(warning: Warning): string {
  switch (warning.outcome) {
    case 'open':
      return warning.quiet ? 'open, came too late to speak' : 'open';
    case 'true':
      return 'came true';
    case 'false':
      return 'did not come true';
    case 'late':
      return 'too late';
    case 'repeat':
      return 'repeat';
    case 'unseen':
      return 'could not be seen';
    case 'acted':
      return 'acted on';
  }
}

/** "Acted on by Ada: heater trimmed", as far as it was said. */
export function actedText({ acted }: Warning): string {
  if (!acted) return 'Acted on';
  return `Acted on${acted.by === '' ? '' : ` by ${acted.by}`}${acted.text === '' ? '' : `: ${acted.text}`}`;
}

/** Whether somebody has acknowledged a warning, in words; a watch that asks nobody says so. */
export function acknowledgedText(warning: Warning, watch: WatchState | undefined): string {
  if (warning.acknowledgedAt !== null) {
    return warning.acknowledgedBy ? `acknowledged by ${warning.acknowledgedBy}` : 'acknowledged';
  }
  return nobodyAsked(warning, watch) ? 'nobody was asked' : 'unacknowledged';
}

/** Whether a warning called nobody: too late to speak, of a trigger, or while its watch was set aside or on trial. */
export function nobodyAsked({ called, quiet }: Warning, watch: WatchState | undefined): boolean {
  return called === undefined ? quiet || watch?.trigger === true : !called;
}

/** The span an open warning speaks for, or what came of it and when. */
export function settledText(warning: Warning, watch: WatchState | undefined): string {
  const word = watch?.switchWord ?? 'switch';
  if (warning.outcome === 'acted') return warning.acted?.text ?? '';
  if (warning.outcome === 'open') return `for ${clockText(warning.from)} to ${clockText(warning.to)}`;
  if (warning.lead !== null) return `${word} after ${spanText(warning.lead)}`;
  return warning.outcome === 'false' ? `no ${word} until ${clockText(warning.to)}` : '';
}

/** How the last settled warning ended, as a sentence for a strip without an open one. */
export function lastText(warning: Warning | undefined, watch: WatchState, today: number): string | null {
  if (warning === undefined || warning.outcome === 'open') return null;
  const when = minuteText(warning.at, today);
  if (warning.outcome === 'true' && warning.lead !== null) {
    return `the last one, at ${when}, came true: ${watch.switchWord} after ${spanText(warning.lead)}`;
  }
  return `the last one, at ${when}: ${outcomeText(warning)}`;
}

/** What a watch's threshold is called at the edge of its strip: "1.7 sd", "42 K", "79 %". */
export function thresholdText(value: number, variable: string, unit: string): string {
  const text = String(Number(value.toPrecision(3))).replace('-', '−');
  if (variable === 'forcing') return `${text} sd`;
  return variable === 'prospect' ? `${Math.round(value * 100)} %` : unit === '' ? text : `${text} ${unit}`;
}

/** The commands that put a model on a channel, ready to be copied. */
export function howToWatch(channel: string): { fit: string; watch: string } {
  const name = /^[\p{L}\p{N}._,+-]+$/u.test(channel) ? channel : `"${channel}"`;
  const stored = name === channel ? `stored:${channel}` : `"stored:${channel}"`;
  return {
    fit: `npx foreshift fit ${stored} --channel ${name} --regime sides:LOW,HIGH --least-lead SECONDS --horizon SECONDS --out model.json`,
    watch: `npx foreshift watch --model model.json --channel ${name}`,
  };
}
