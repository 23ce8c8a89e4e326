import { inUnit, percent, spanWords as plainSpan, short, type TimeUnit } from '../words.ts';

const ENTITIES: Record<string, string> = {
  '&': '&amp;',
  '<': '&lt;',
  '>': '&gt;',
  '"': '&quot;',
  "'": '&#39;',
};

/** Text that can stand in HTML and in a quoted attribute: nothing of it is read as markup. */
export const escapeHtml = (text: string): string => text.replace(/[&<>"']/g, (sign) => ENTITIES[sign]!);

/** A piece of HTML that may be put into another one as it is. */
export interface Html {
  html: string;
}

type Part = Html | string | number | null | readonly (Html | string)[];

/** Makes HTML of a template: strings and numbers put into it are escaped, pieces of HTML and lists are not. */
export function html(strings: TemplateStringsArray, ...parts: Part[]): Html {
  const text = (part: Part): string => {
    if (part === null) return '';
    if (Array.isArray(part)) return part.map(text).join('');
    return typeof part === 'object' ? (part as Html).html : escapeHtml(String(part));
  };
  return { html: strings.reduce((sum, string, i) => sum + text(parts[i - 1] ?? null) + string) };
}

/** A figure as people read it, with the number itself beside it: `<data value="0.9534">95 %</data>`. */
export const figure = (value: number | null, words: (value: number) => string): Html =>
  value === null || !Number.isFinite(value)
    ? html`<span class="none">–</span>`
    : html`<data value="${value}">${words(value)}</data>`;

/** Words that do not break, with the minus sign of print. */
const printed = (words: string): string => words.replaceAll(' ', '\u00a0').replace(/^-/, '−');

/** A sentence in which figures keep their unit, with the minus sign of print. */
export const sentenceWords = (sentence: string): string =>
  sentence
    .replace(/(\d) (?=%|sd\b|ns\b|µs\b|ms\b|s\b|min\b|h\b|days\b|years\b)/g, '$1\u00a0')
    .replace(/(^| )-(?=\d)/g, '$1−');

/** "95 %" of a share; a tenth more where it is close to nothing or to all. */
export const percentWords = (share: number): string => printed(percent(share));

/** A number with about three digits: "0.8", "12.3", "1240". */
export const shortWords = (value: number): string => printed(short(value));

/** How a rate, one per hour, is read in a unit. */
export const rateWords =
  (unit: TimeUnit) =>
  (perHour: number): string =>
    shortWords(inUnit(perHour, unit));

/** A skill: "0.53", "−0.07". */
export const hundredthWords = (value: number): string =>
  printed(value.toFixed(2)).replace(/^−(0\.00)$/, '$1');

/** "20 ms", "45.2 s", "29.6 min", "3.2 h", "12 days", "3 years". */
export const spanWords = (seconds: number): string => printed(plainSpan(seconds));

/** A recording that begins below this has elapsed time, not the time of a clock. */
const CLOCK_TIME = 1e8;

/** "2026-12-01 09:30:05 UTC", or "412.5 s" of elapsed time, in a recording that begins at `begins`. */
export function timeWords(time: number, begins: number): string {
  if (begins < CLOCK_TIME) return `${Number(time.toFixed(3))}\u00a0s`;
  return `${new Date(1000 * time).toISOString().slice(0, 19).replace('T', ' ')} UTC`;
}
