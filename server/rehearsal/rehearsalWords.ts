import type { Contender } from '../../shared-types/rehearsal.ts';
import type { Score } from '../../shared-types/score.ts';
import { skillDifference } from './difference.ts';
import { eventsOf, type Verdictable } from './judge.ts';
import type { Tuned } from './tune.ts';
import { leadWords, scoreSentence, whereWords } from './words.ts';

/** Unit of a signal's threshold. */
function unitOf(name: string, unit: string): string {
  if (name === 'forcing') return 'sd';
  if (name.startsWith('lag-1') || name === 'a clock') return '';
  if (name === 'time since the last switch') return 's';
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

/**
 * The baseline with the highest skill on the judged part, and our skill less its. Where a ceiling was agreed to and the
 * chosen one keeps within it, a baseline that did not when it was tuned may not be used and is no rival; without a
 * ceiling every one is, also one of whose warnings fewer than half come true.
 */
export function rivalOf(
  ours: Verdictable,
  baselines: readonly Verdictable[],
  ceiling: boolean,
  uniform: () => number,
): { judged: Verdictable; difference: { skill: number; value: number; low: number; high: number } } | null {
  const fair = baselines.filter(
    ({ tuned, point }) => point !== null && (!ceiling || ours.tuned.weak || !tuned.weak),
  );
  const best = fair.reduce<Verdictable | null>(
    (found, one) => (found === null || one.point!.skill > found.point!.skill ? one : found),
    null,
  );
  if (best === null || ours.point === null) return null;
  const difference = skillDifference(...eventsOf(ours.blocks, best.blocks), uniform);
  return { judged: best, difference: { skill: best.point!.skill, ...difference } };
}

/** The answer first: what was chosen and what it did, and the best baseline beside it. */
export function sentenceOf(watched: string, score: Score, word: string, rival: Verdictable | null): string {
  const ours = scoreSentence(watched, score, word);
  if (rival === null || rival.point === null) return `${ours}.`;
  const { name } = rival.tuned.signal;
  const lead = rival.medianLead === null ? '' : ` with ${leadWords(rival.medianLead)}`;
  return `${ours}; ${name} warned ${rival.point.tally.switches.warned}${lead}.`;
}
