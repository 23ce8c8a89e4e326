import type { SwitchCard } from '../../shared-types/rehearsal.ts';
import { thresholdText } from '../warningWords.ts';
import { capital, clockText, spanText } from '../words.ts';

/** What a card needs to know beside the card itself. */
export interface CardSetting {
  /** unit of the channel */
  unit: string;
  /** the word for a switch: "reversal" */
  switchWord: string;
}

/** "Reversal of Loop A at 14:32:07.3". */
export function cardTitle(card: SwitchCard, { switchWord }: CardSetting): string {
  return `${capital(switchWord)} of ${card.channel} at ${clockText(card.at, 1)}`;
}

/** Whether and when the switch was warned, as a sentence. */
export function outcomeSentence(card: SwitchCard): string {
  const { warnedAt, lead, leastLead, horizon } = card;
  const before = lead === null || warnedAt === null ? null : spanText(Number(lead.toPrecision(3)));
  switch (card.outcome) {
    case 'warned':
      return before === null ? 'Warned in time.' : `Warned ${before} before, at ${clockText(warnedAt!, 1)}.`;
    case 'late':
      return before === null
        ? `Late: the warning came less than ${spanText(leastLead)} before.`
        : `Late: the warning came ${before} before, ${spanText(leastLead)} are needed.`;
    case 'missed':
      return `Missed: no warning between ${spanText(horizon)} and ${spanText(leastLead)} before it.`;
    case 'blind':
      return `Blind: the window was not full at any moment between ${spanText(horizon)} and ${spanText(leastLead)} before it, so that no warning was possible.`;
    case 'pending':
      return 'What became of it is not known yet.';
  }
}

/** Which threshold would have caught the switch and what that would have cost, as a sentence. */
export function catchingSentence(card: SwitchCard, { unit }: CardSetting): string {
  const { catching, threshold, notKnown } = card;
  const say = (value: number) => thresholdText(value, variableOf(card), unit);
  if (notKnown != null) return `What another threshold would have cost is not known: ${notKnown}.`;
  if (catching === null) return 'No threshold that was tried would have caught it in time.';
  const share =
    catching.cameTrue === null ? '' : `, ${Math.round(100 * catching.cameTrue)} of 100 warnings coming true`;
  const cost = perHour(catching.falsePerHour) + share;
  return Math.abs(catching.threshold - threshold) <= 1e-9 * Math.abs(threshold)
    ? `No stricter threshold than the one in use, ${say(threshold)}, would have caught it; in rehearsal it has ${cost}.`
    : `The strictest threshold that would have caught it is ${say(catching.threshold)} (in use: ${say(threshold)}); in rehearsal that has ${cost}.`;
}

function perHour(rate: number): string {
  const text = rate === 0 ? 'no' : rate >= 10 ? rate.toFixed(0) : String(Number(rate.toPrecision(2)));
  return `${text} false ${rate === 1 ? 'warning' : 'warnings'} an hour`;
}

/** The variable in the words' own terms: the forcing, or a level in the channel's unit. */
export function variableOf({ variable }: Pick<SwitchCard, 'variable'>): 'forcing' | 'level' {
  return variable === 'forcing' ? 'forcing' : 'level';
}

/** A moment as seen from the switch: "12.4 s before", "at the switch", "3 s after". */
export function momentText(seconds: number): string {
  const size = Math.abs(seconds);
  if (size < 1e-9) return 'at the switch';
  return `${size < 0.1 ? `${Number(size.toPrecision(2))} s` : spanText(size)} ${seconds < 0 ? 'before' : 'after'}`;
}
