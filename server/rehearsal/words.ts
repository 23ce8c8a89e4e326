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

/** "the only switch", "both switches", "all 12 switches". */
export function allOf(count: number, word: string): string {
  if (count === 1) return `the only ${word}`;
  return `${count === 2 ? 'both' : `all ${count}`} ${pluralOf(word)}`;
}

/** "switches", "reversals". */
export const pluralOf = (word: string): string => (/(s|x|ch|sh)$/.test(word) ? `${word}es` : `${word}s`);

/** A number with about three digits: "0.8", "12.3", "1234", "1.7e-7". */
export const short = (value: number): string =>
  Math.abs(value) >= 1000 && Math.abs(value) < 1e6
    ? String(Math.round(value))
    : String(Number(value.toPrecision(3)));

/** A skill, a difference of skills or a p-value to a thousandth: "0.53", "-0.017". */
export const thousandths = (value: number): string => String(Number(value.toFixed(3)));

/** "12 %" of a share, a tenth more where it is close to nothing or to all; "–" of null. */
export function percent(share: number | null): string {
  if (share === null) return '–';
  const of100 = 100 * share;
  const close = of100 > 0 && of100 < 100 && (of100 < 1 || of100 > 99);
  return `${of100.toFixed(close ? 1 : 0)} %`;
}

const DAY = 86_400;
/** of 365.25 days */
const YEAR = 365.25 * DAY;

/** What a span or a rate is counted in: "min", "an hour". */
export interface TimeUnit {
  words: string;
  seconds: number;
}

/** Units of a span, each used up to its last entry, seconds. */
const SPAN_UNITS: readonly (readonly [words: string, seconds: number, until: number])[] = [
  ['ns', 1e-9, 1e-7],
  ['µs', 1e-6, 1e-4],
  ['ms', 1e-3, 0.1],
  ['s', 1, 120],
  ['min', 60, 7200],
  ['h', 3600, 2 * DAY],
  ['days', DAY, 1.5 * YEAR],
  ['years', YEAR, Number.POSITIVE_INFINITY],
];

/** Units of a rate, each used where so many seconds were watched up to its last entry. */
const RATE_UNITS: typeof SPAN_UNITS = [
  ['a second', 1, 60],
  ['a minute', 60, 600],
  ['an hour', 3600, 10 * DAY],
  ['a day', DAY, 3 * YEAR],
  ['a year', YEAR, Number.POSITIVE_INFINITY],
];

function unitUntil(units: typeof SPAN_UNITS, size: number): TimeUnit {
  const [words, seconds] = units.find(([, , until]) => size < until) ?? units.at(-1)!;
  return { words, seconds };
}

/** The unit that fits a span. */
export const spanUnitOf = (seconds: number): TimeUnit =>
  seconds === 0 ? { words: 's', seconds: 1 } : unitUntil(SPAN_UNITS, Math.abs(seconds));

/** A span in the unit that fits it: "20 ms", "45.2 s", "29.6 min", "3.2 h", "12 days", "3 years". */
export function spanWords(seconds: number): string {
  const unit = spanUnitOf(seconds);
  return `${short(seconds / unit.seconds)} ${unit.words}`;
}

/** The unit in which rates read well where so many seconds were watched: "an hour", for a long recording "a year". */
export const rateUnitOf = (watchedSeconds: number): TimeUnit => unitUntil(RATE_UNITS, watchedSeconds);

/** A rate in its unit, from one per hour. */
export const inUnit = (perHour: number, { seconds }: TimeUnit): number => (perHour * seconds) / 3600;

/** "0.8 false warnings an hour", "1 false warning a year". */
export function falseRateWords(perHour: number, watchedSeconds: number): string {
  const unit = rateUnitOf(watchedSeconds);
  const rate = short(inUnit(perHour, unit));
  return `${rate} false ${rate === '1' ? 'warning' : 'warnings'} ${unit.words}`;
}

/** Where a rule warns: "above 1.7 sd", "below -2.1 K"; a threshold in seconds that is a span is read as one. */
export function whereWords(
  { direction, threshold }: Pick<WatchRule, 'direction' | 'threshold'>,
  unit: string,
): string {
  const value = unit === 'span' ? spanWords(threshold) : `${short(threshold)} ${unit}`.trimEnd();
  return `${direction === 'falling' ? 'below' : 'above'} ${value}`;
}

/** "Forcing above 1.7 sd warned 41 of 43 reversals, 95 % interval 85 to 99 %, median lead 1.1 s, …", no full stop. */
export function scoreSentence(watched: string, score: Score, word: string): string {
  const { switches, detection, lead, falsePerHour, watchedSeconds } = score;
  const total = switches.warned + switches.late + switches.missed;
  if (total === 0) return `${watched}: no ${word} of the judged part could have been warned of`;
  const low = percent(detection.low ?? 0).replace(' %', '');
  const parts = [
    `${watched} warned ${switches.warned} of ${counted(total, word)}`,
    `95 % interval ${low} to ${percent(detection.high)}`,
  ];
  if (lead.median !== null) parts.push(`median lead ${spanWords(lead.median)}`);
  if (falsePerHour.value !== null) parts.push(falseRateWords(falsePerHour.value, watchedSeconds));
  return parts.join(', ');
}
