import type { DelayPart, MeasuredDelay } from '../../shared-types/delivery.ts';
import { clockText, spanText } from '../words.ts';

/** A delay in words, to two digits: "0.3 ms", "82 ms", "0.31 s", "12 s". */
export function delayText(seconds: number): string {
  const size = Math.abs(seconds);
  if (size < 0.0995) return `${Number((1000 * size).toPrecision(2))} ms`;
  return size < 9.95 ? `${Number(size.toPrecision(2))} s` : spanText(size);
}

/** What a trial came to, as one sentence. */
export function delaySentence({ total, leastLead, left }: MeasuredDelay): string {
  const comes = `A warning reaches you ${delayText(total)} after the sample that told of it`;
  if (leastLead === null || left === null) return `${comes}.`;
  if (left <= 0)
    return `${comes}: that is the whole least lead of ${spanText(leastLead)} and more. A warning may come too late to act on.`;
  return `${comes}: of the least lead of ${spanText(leastLead)}, ${leftText(leastLead, left)} for you.`;
}

/** "9.7 s are left"; a delay too small to show beside the lead leaves nearly all of it. */
function leftText(leastLead: number, left: number): string {
  return leastLead - left < 0.005 * leastLead ? 'nearly all is left' : `${delayText(left)} are left`;
}

/** The strip's own line: how late, when it was measured, what is left. */
export function delayLine({ total, at, left }: MeasuredDelay): string {
  const remains = left === null || left > 0 ? '' : ': that eats the least lead';
  return `a warning reaches you ${delayText(total)} late, measured at ${clockText(at).slice(0, 5)}${remains}`;
}

/** A line of the table: a part of the way, how long it took, and how that is known. */
export interface DelayRow {
  name: string;
  seconds: string;
  text: string;
  /** a part of the total, or of what the part above consists of */
  level: 'part' | 'within' | 'sum';
}

const row = (
  name: string,
  { seconds, how, text }: DelayPart,
  level: DelayRow['level'] = 'part',
): DelayRow => ({
  name,
  seconds: seconds === null ? '–' : `${how === 'estimated' ? 'about ' : ''}${delayText(seconds)}`,
  text: seconds === null ? `not measured: ${text}` : text,
  level,
});

/** The whole way, part by part. */
export function delayRows(delay: MeasuredDelay): DelayRow[] {
  const { rig, network, program, delivery, page, tone, webhooks, total, leastLead, left } = delay;
  return [
    row('Rig', rig),
    row('Network', network),
    row('Program', program),
    row('Delivery', delivery),
    row('page', page, 'within'),
    row('tone', tone, 'within'),
    ...webhooks.map((webhook) => row(`webhook ${webhook.receiver}`, webhook, 'within')),
    { name: 'Together', seconds: delayText(total), text: 'of what could be measured', level: 'sum' },
    ...(left === null || leastLead === null
      ? []
      : [
          {
            name: 'Left for you',
            seconds: left > 0 ? delayText(left) : 'nothing',
            text: `of the least lead of ${spanText(leastLead)}`,
            level: 'sum' as const,
          },
        ]),
  ];
}

/** What a rehearsal is told, to charge this delay: tenths of a second, rounded up. */
export function chargedDelay(total: number): string {
  return String(Math.ceil(10 * total - 1e-9) / 10);
}
