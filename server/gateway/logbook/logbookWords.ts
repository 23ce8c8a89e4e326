import type { SwitchEvent, Warning } from '../../../shared-types/warning.ts';

/** Times below this (s) are elapsed time, not Unix time. */
const UNIX_FROM = 1e8;
const pad = (value: number) => String(value).padStart(2, '0');

/** A time of day in UTC to the tenth, "14:32:07.3"; elapsed time as "1:02:07.3 elapsed". */
export function clockText(time: number): string {
  const tenths = Math.floor(10 * time + 1e-6);
  const seconds = Math.floor(tenths / 10);
  const inDay = ((seconds % 86400) + 86400) % 86400;
  const tail = `${pad(Math.floor(inDay / 60) % 60)}:${pad(inDay % 60)}.${tenths - 10 * seconds}`;
  return time < UNIX_FROM
    ? `${Math.floor(seconds / 3600)}:${tail} elapsed`
    : `${pad(Math.floor(inDay / 3600))}:${tail}`;
}

/** A span of seconds in three digits and a unit that suits: "0.24 s", "16 s", "3.5 min", "2.1 h". */
export function spanText(seconds: number): string {
  const [size, unit] =
    seconds < 120 ? [seconds, 's'] : seconds < 7200 ? [seconds / 60, 'min'] : [seconds / 3600, 'h'];
  return `${size >= 100 ? Math.round(size) : Number(size.toPrecision(size >= 10 ? 3 : 2))} ${unit}`;
}

const numberText = (value: number) => String(Number(value.toPrecision(3))).replace('-', '−');

/** What a warning said: "reversal expected 14:31:12.0 to 14:31:22.0: forcing 2.1, threshold 1.7". */
export function warningText(warning: Warning, switchWord: string): string {
  const { from, to, variable, value, threshold, quiet } = warning;
  const late = quiet ? '; it came too late to speak, nobody was called' : '';
  const unit = variable === 'forcing' ? ' sd' : '';
  return (
    `${switchWord} expected ${clockText(from)} to ${clockText(to)}: ` +
    `${variable} ${numberText(value)}${unit}, threshold ${numberText(threshold)}${unit}${late}`
  );
}

/** What became of a warning, and whether somebody acknowledged it. */
export function warningBecame(warning: Warning, switchWord: string): string {
  const acknowledged = warning.acknowledgedAt === null ? '' : '; acknowledged';
  return `${outcomeWords(warning, switchWord)}${acknowledged}`;
}

function outcomeWords({ outcome, lead, acted }: Warning, switchWord: string): string {
  const after = lead === null ? '' : `: ${switchWord} after ${spanText(lead)}`;
  switch (outcome) {
    case 'open':
      return 'open';
    case 'true':
      return `came true${after}`;
    case 'repeat':
      return `a repeat${after}`;
    case 'late':
      return `too late${after}`;
    case 'false':
      return 'did not come true';
    case 'unseen':
      return 'could not be seen: a gap in the span';
    case 'acted':
      return `acted on${acted?.by ? ` by ${acted.by}` : ''}${acted?.text ? `: ${acted.text}` : ''}`;
  }
}

/** What a switch was: "reversal, upward; sure 2.4 s later". */
export function switchText({ from, to, at, confirmedAt }: SwitchEvent, switchWord: string): string {
  const way = to > from ? 'upward' : 'downward';
  return confirmedAt > at
    ? `${switchWord}, ${way}; sure ${spanText(confirmedAt - at)} later`
    : `${switchWord}, ${way}`;
}

/** Whether a switch was warned. */
export function switchBecame({ outcome, lead }: SwitchEvent): string {
  switch (outcome) {
    case 'pending':
      return 'not known yet';
    case 'warned':
      return lead === null ? 'warned' : `warned ${spanText(lead)} before`;
    case 'late':
      return lead === null ? 'warned too late' : `warned too late, ${spanText(lead)} before`;
    case 'missed':
      return 'missed: no warning';
    case 'blind':
      return 'blind: no warning was possible';
  }
}
