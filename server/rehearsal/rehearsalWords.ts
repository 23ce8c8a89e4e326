import type { Contender } from '../../shared-types/rehearsal.ts';
import type { Score } from '../../shared-types/score.ts';
import { skillDifference } from './difference.ts';
import type { Verdictable } from './judge.ts';
import { tauOf } from './tally.ts';
import type { Tuned } from './tune.ts';
import { scoreSentence, short, whereWords } from './words.ts';

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
 * The baseline with the highest skill on the judged part among those that kept within the ceiling when they were tuned
 * (where the chosen one did not, among all), and our skill less its. A baseline that may not be used is no rival.
 */
export function rivalOf(
  ours: Verdictable,
  baselines: readonly Verdictable[],
  uniform: () => number,
): { judged: Verdictable; difference: { skill: number; value: number; low: number; high: number } } | null {
  const fair = baselines.filter(({ tuned, point }) => point !== null && (ours.tuned.weak || !tuned.weak));
  const best = fair.reduce<Verdictable | null>(
    (found, one) => (found === null || one.point!.skill > found.point!.skill ? one : found),
    null,
  );
  if (best === null || ours.point === null) return null;
  const seen = [...ours.blind.keys()].filter((i) => ours.blind[i] === 0);
  const judged = ({ warned, point }: Verdictable) => ({
    warned: Uint8Array.from(seen, (i) => warned[i]!),
    tau: tauOf(point!.tally),
  });
  const difference = skillDifference(judged(ours), judged(best), uniform);
  return { judged: best, difference: { skill: best.point!.skill, ...difference } };
}

/** The answer first: what was chosen and what it did, and the best baseline beside it. */
export function sentenceOf(watched: string, score: Score, word: string, rival: Verdictable | null): string {
  const ours = scoreSentence(watched, score, word);
  if (rival === null || rival.point === null) return `${ours}.`;
  const { name } = rival.tuned.signal;
  const lead = rival.medianLead === null ? '' : ` with ${short(rival.medianLead)} s`;
  return `${ours}; ${name} warned ${rival.point.tally.switches.warned}${lead}.`;
}
