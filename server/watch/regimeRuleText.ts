import type { RegimeRule } from '../../shared-types/watch.ts';
import { steppedRegime } from './regimeRule.ts';

const FORMS: Record<RegimeRule['kind'], string> = {
  sides: 'sides:LOW,HIGH',
  levels: 'levels:A,B,...,deadband=D',
  excursion: 'excursion:LEVEL,REARM,GAP',
  dip: 'dip:LEVEL,REARM,GAP',
  burst: 'burst:WINDOW,LEVEL,REARM',
  marks: 'marks:CHANNEL',
};

/**
 * Reads the text form of a regime rule: `sides:-0.8,0.8`, `levels:1,2,deadband=0.1`, `excursion:5,4,2`, `dip:1,2,0`,
 * `burst:3,0.5,0.3`, `marks:valve`; `to=up` or `to=down` after it keeps one direction.
 *
 * @throws RangeError in a sentence when the text is no rule
 */
export function parseRegimeRule(text: string): RegimeRule {
  const colon = text.indexOf(':');
  const kind = text.slice(0, Math.max(0, colon)).trim() as RegimeRule['kind'];
  if (!(kind in FORMS)) {
    throw new RangeError(
      `"${text}" is no rule for a switch; write one of ${Object.values(FORMS).join(', ')}`,
    );
  }
  const { words, to, deadband } = splitArguments(text.slice(colon + 1), kind, text);
  const rule = build(kind, words, deadband, text);
  if (to !== undefined) checkDirection(rule.kind, to, text);
  steppedRegime(rule, 1);
  return to === undefined ? rule : { ...rule, to };
}

function splitArguments(tail: string, kind: RegimeRule['kind'], text: string) {
  const words: string[] = [];
  let to: 'up' | 'down' | undefined;
  let deadband: string | undefined;
  for (const word of tail.split(kind === 'marks' ? /,|\s+(?=to=)/ : /[,\s]+/)) {
    const trimmed = word.trim();
    const [key, setting] = trimmed.split('=', 2);
    if (setting === undefined) {
      if (trimmed !== '') words.push(trimmed);
    } else if (key === 'to' && (setting === 'up' || setting === 'down')) to = setting;
    else if (key === 'deadband' && kind === 'levels') deadband = setting;
    else
      throw new RangeError(
        `"${trimmed}" in "${text}" is not understood; ${FORMS[kind]}, then to=up or to=down`,
      );
  }
  return { words, to, deadband };
}

function build(
  kind: RegimeRule['kind'],
  words: string[],
  deadband: string | undefined,
  text: string,
): RegimeRule {
  if (kind === 'marks') {
    if (words.length !== 1) throw new RangeError(`"${text}" must name one channel: ${FORMS.marks}`);
    return { kind, channel: words[0]! };
  }
  const numbers = words.map((word) => toNumber(word, text));
  if (kind === 'levels') {
    if (numbers.length === 0) throw new RangeError(`"${text}" names no level; write ${FORMS.levels}`);
    return { kind, levels: numbers, deadband: deadband === undefined ? 0 : toNumber(deadband, text) };
  }
  const expected = kind === 'sides' ? 2 : 3;
  if (numbers.length !== expected) {
    throw new RangeError(`"${text}" has ${numbers.length} numbers, expected ${expected}: ${FORMS[kind]}`);
  }
  const [a, b, c] = numbers as [number, number, number];
  if (kind === 'sides') return { kind, low: a, high: b };
  if (kind === 'burst') return { kind, window: a, level: b, rearm: c };
  return { kind, level: a, rearm: b, gap: c };
}

function toNumber(word: string, text: string): number {
  const number = Number(word);
  if (word === '' || !Number.isFinite(number))
    throw new RangeError(`"${word}" in "${text}" is not a number; use digits and a point`);
  return number;
}

function checkDirection(kind: RegimeRule['kind'], to: 'up' | 'down', text: string): void {
  if (kind === 'sides' || kind === 'levels') return;
  if ((kind === 'dip') === (to === 'down')) return;
  throw new RangeError(
    `"${text}": ${kind} knows only to=${kind === 'dip' ? 'down' : 'up'}; leave to=${to} out`,
  );
}

/** The text form of a regime rule; `parseRegimeRule` reads it back. */
export function regimeRuleText(rule: RegimeRule): string {
  const tail = rule.to === undefined ? '' : `,to=${rule.to}`;
  switch (rule.kind) {
    case 'sides':
      return `sides:${rule.low},${rule.high}${tail}`;
    case 'levels':
      return `levels:${rule.levels.join(',')},deadband=${rule.deadband}${tail}`;
    case 'burst':
      return `burst:${rule.window},${rule.level},${rule.rearm}${tail}`;
    case 'marks':
      return `marks:${rule.channel}${tail}`;
    default:
      return `${rule.kind}:${rule.level},${rule.rearm},${rule.gap}${tail}`;
  }
}
