import type { Contender } from '../../shared-types/rehearsal.ts';
import type { Score } from '../../shared-types/score.ts';
import type { Verdictable } from './judge.ts';
import type { Tuned } from './tune.ts';
import { scoreSentence, spanWords, whereWords } from './words.ts';

/** Unit of a signal's threshold; "span": seconds that are to be read as a span. */
function unitOf(name: string, unit: string): string {
  if (name === 'forcing') return 'sd';
  if (name.startsWith('lag-1') || name === 'a clock') return '';
  if (name === 'time since the last switch') return 'span';
  if (unit === '') return '';
  if (name.startsWith('rate')) return `${unit}/s`;
  return name.startsWith('running variance') ? `${unit}²` : unit;
}

/** "Forcing above 1.7 sd", "The level below 2 K". */
export function watchedWords({ signal, point }: Tuned, unit: string): string {
  const what = signal.variable === 'forcing' ? 'Forcing' : 'The level';
  return `${what} ${whereWords(point.rule, unitOf(signal.name, unit))}`;
}

/** A tuned and judged signal as the page and the report list it. */
export function contenderOf(
  { tuned, point, curve }: Verdictable,
  variable: boolean,
  unit: string,
): Contender {
  const { signal } = tuned;
  const where = signal.name === 'a clock' ? '' : whereWords(tuned.point.rule, unitOf(signal.name, unit));
  return {
    name: signal.name,
    kind: variable ? 'variable' : 'baseline',
    settings: [where, signal.setting].filter((part) => part !== '').join(', '),
    skill: point?.skill ?? null,
    detection: point?.detection ?? null,
    cameTrue: point?.cameTrue ?? null,
    curve,
  };
}

/** The answer first: what was chosen and what it did, and the best baseline beside it; `delay` (s) is off the leads. */
export function sentenceOf(
  watched: string,
  score: Score,
  word: string,
  rival: Verdictable | null,
  delay: number,
): string {
  const ours = scoreSentence(watched, score, word);
  if (rival === null || rival.point === null) return `${ours}.`;
  const { name } = rival.tuned.signal;
  const lead = rival.medianLead === null ? '' : ` with ${spanWords(rival.medianLead - delay)}`;
  return `${ours}; ${name} warned ${rival.point.tally.switches.warned}${lead}.`;
}
