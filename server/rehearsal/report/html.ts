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

/** "95 %" of a share; a tenth more where it is close to nothing or to all. */
export function percentWords(share: number): string {
  const percent = 100 * share;
  const digits = percent > 0 && percent < 100 && (percent < 1 || percent > 99) ? 1 : 0;
  return `${percent.toFixed(digits)}\u00a0%`;
}

/** A number with three digits, without an exponent where it can be: "0.8", "12.3", "1240". */
export function shortWords(value: number): string {
  const short = Number(value.toPrecision(3));
  return (Math.abs(value) >= 1000 ? String(Math.round(value)) : String(short)).replace('-', '−');
}

/** Below this a recording has elapsed time, not the time of a clock. */
const CLOCK_TIME = 1e8;

/** "2026-12-01 09:30:05 UTC", or "412.5 s" of elapsed time. */
export function timeWords(time: number): string {
  if (time < CLOCK_TIME) return `${Number(time.toFixed(3))}\u00a0s`;
  return `${new Date(1000 * time).toISOString().slice(0, 19).replace('T', ' ')} UTC`;
}

/** "45.2 s". */
export const secondsWords = (seconds: number): string => `${shortWords(seconds)}\u00a0s`;

/** "45.2 s", "29.6 min", "3.2 h", "12 days". */
export function spanWords(seconds: number): string {
  if (seconds < 120) return secondsWords(seconds);
  if (seconds < 7200) return `${shortWords(seconds / 60)}\u00a0min`;
  return seconds < 172_800
    ? `${shortWords(seconds / 3600)}\u00a0h`
    : `${shortWords(seconds / 86_400)}\u00a0days`;
}
