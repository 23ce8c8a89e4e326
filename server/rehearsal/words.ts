import type { Score } from '../../shared-types/score.ts';
import type { RegimeRule, WatchRule } from '../../shared-types/watch.ts';

/** The word for a switch of this rule: "reversal", "excursion", "dip", "burst", else "switch". */
export function switchWordOf({ kind }: RegimeRule): string {
  if (kind === 'sides') return 'reversal';
  return kind === 'excursion' || kind === 'dip' || kind === 'burst' ? kind : 'switch';
}

/** "1 switch", "3 switches". */
export function counted(count: number, word: string): string {
  if (count === 1) return `1 ${word}`;
  return `${count} ${pluralOf(word)}`;
}

/** "switches", "reversals". */
export const pluralOf = (word: string): string => (/(s|x|ch|sh)$/.test(word) ? `${word}es` : `${word}s`);

/** A number with about three digits: "0.8", "12.3", "1.7e-7". */
export const short = (value: number): string => String(Number(value.toPrecision(3)));

/** "12 %" of a share; "–" of null. */
export const percent = (share: number | null): string =>
  share === null ? '–' : `${(100 * share).toFixed(0)} %`;

/** Where a rule warns: "above 1.7 sd", "below −2.1 K". */
export function whereWords(
  { direction, threshold }: Pick<WatchRule, 'direction' | 'threshold'>,
  unit: string,
) {
  return `${direction === 'falling' ? 'below' : 'above'} ${short(threshold)} ${unit}`.trimEnd();
}

/** "Forcing above 1.7 sd warned 41 of 43 reversals, 95 % interval 85 to 99 %, median lead 1.1 s, …", no full stop. */
export function scoreSentence(watched: string, score: Score, word: string): string {
  const { switches, detection, lead, falsePerHour } = score;
  const total = switches.warned + switches.late + switches.missed;
  if (total === 0) return `${watched}: no ${word} of the judged part could have been warned of`;
  const low = ((detection.low ?? 0) * 100).toFixed(0);
  const parts = [
    `${watched} warned ${switches.warned} of ${counted(total, word)}`,
    `95 % interval ${low} to ${percent(detection.high)}`,
  ];
  if (lead.median !== null) parts.push(`median lead ${leadWords(lead.median)}`);
  if (falsePerHour.value !== null) parts.push(falseRateWords(falsePerHour.value));
  return parts.join(', ');
}

/** "12 minutes", "3.4 hours", "5 days", "2.1 years" of seconds. */
export function spanWords(seconds: number): string {
  if (seconds < 90) return `${short(seconds)} seconds`;
  if (seconds < 5400) return `${short(seconds / 60)} minutes`;
  if (seconds < 4 * DAY) return `${short(seconds / HOUR)} hours`;
  return seconds < YEAR ? `${short(seconds / DAY)} days` : `${short(seconds / YEAR)} years`;
}

const HOUR = 3600;
const DAY = 86_400;
const YEAR = 365.25 * DAY;

/** A lead: in seconds as long as that can be read, "15.2 s", then as any span. */
export const leadWords = (seconds: number): string =>
  seconds < 600 ? `${short(seconds)} s` : spanWords(seconds);

/** "0.8 false warnings an hour", and a day or a year where an hour is too short to have one in. */
export function falseRateWords(perHour: number): string {
  if (perHour === 0 || perHour >= 0.05) return `${short(perHour)} false warnings an hour`;
  const perDay = (perHour * DAY) / HOUR;
  return perDay >= 0.05
    ? `${short(perDay)} false warnings a day`
    : `${short((perHour * YEAR) / HOUR)} false warnings a year`;
}
