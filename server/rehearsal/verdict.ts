import type { Ceiling, Verdict } from '../../shared-types/rehearsal.ts';
import type { Score } from '../../shared-types/score.ts';
import { LEAST_PERFECT_SKILL } from './perfect.ts';
import {
  counted,
  falseRateWords,
  inUnit,
  percent,
  pluralOf,
  rateUnitOf,
  short,
  spanWords,
  thousandths,
} from './words.ts';

/** Fewer judged switches than this say too little. */
export const FEWEST_EVENTS = 10;
/** From this chance of a warner without knowledge doing as well, no skill is claimed. */
const LARGEST_P = 0.01;

/** What a verdict is given on. */
export interface VerdictTask {
  /** of the judged part, with its p-value */
  score: Score;
  /** what was chosen: "forcing", "level rising" */
  variable: string;
  ceiling: Ceiling;
  /** the best baseline and our skill less its, with the 95 % interval; null: none could be judged */
  rival: { name: string; skill: number; value: number; low: number; high: number } | null;
  /** the best plain level beside what was chosen: of the baselines only a level can be watched */
  level: { name: string; skill: number } | null;
  /** a baseline with more skill that does not keep within the ceiling */
  outside: { name: string; skill: number } | null;
  /** the model was fitted on what is judged */
  fittedOnJudged: boolean;
  /** a level could have been passed over for the forcing */
  levelChosenFreely: boolean;
  /** skill of the perfect warner */
  perfect: number | null;
  word: string;
  /** switches an hour in all recordings, and the share of the time that is judged */
  perHour: number;
  judgedShare: number;
}

/** The verdict of a rehearsal: the first of the kinds in their order that applies, in a sentence with its figures. */
export function verdictOf(task: VerdictTask): Verdict {
  const { kind, than, sentence } = firstThatApplies(task);
  const { perfect, word } = task;
  const crowded =
    perfect !== null && perfect < LEAST_PERFECT_SKILL
      ? ` The horizon is too long for such frequent ${pluralOf(word)}: even a perfect warner would have a skill of ${thousandths(perfect)}.`
      : '';
  const beyond = kind === 'no skill' || kind === 'no better than' ? ceilingFault(task) : null;
  const asked = beyond === null ? '' : ` Nor does it keep within what was asked for: ${beyond}.`;
  return { kind, than, sentence: `${sentence}${asked}${crowded}` };
}

function firstThatApplies(task: VerdictTask): Verdict {
  const { score, rival, word } = task;
  const { warned, late, missed } = score.switches;
  const total = warned + late + missed;
  const verdict = (kind: Verdict['kind'], sentence: string, than: string | null = null) => ({
    kind,
    than,
    sentence,
  });
  if (total < FEWEST_EVENTS) return verdict('too few events', tooFewWords(task, total));
  const { skill, pValue } = score;
  if (pValue === null || pValue >= LARGEST_P) {
    const chance = pValue === null ? '' : ` (p ${thousandths(pValue)})`;
    return verdict(
      'no skill',
      `No skill: warnings as many, moved to another time, do as well often enough${chance}; skill ${thousandths(skill ?? 0)} on ${counted(total, word)}.`,
    );
  }
  if (rival !== null && rival.low <= 0) {
    return verdict(
      'no better than',
      `${noBetterWords(task, rival, total)} ${adviceWords(task, rival)}`,
      rival.name,
    );
  }
  const fault = faultOf(task);
  if (fault !== null)
    return verdict('weak', `Weak: ${fault}; skill ${thousandths(skill!)}, p ${thousandths(pValue)}.`);
  return verdict('useful', usefulWords(task));
}

type Rival = NonNullable<VerdictTask['rival']>;

const isLevel = (name: string): boolean => name.startsWith('level ');

function noBetterWords({ score, variable, word }: VerdictTask, rival: Rival, total: number): string {
  const ours = isLevel(variable) ? `the ${variable}, chosen here,` : `the ${variable}`;
  return `No better than ${rival.name}: its skill is ${thousandths(rival.skill)}, that of ${ours} ${thousandths(score.skill!)}; difference ${thousandths(rival.value)}, 95 % interval ${thousandths(rival.low)} to ${thousandths(rival.high)} on ${counted(total, word)}.`;
}

/** What to do when a baseline is as good: of baselines a watch can have the level only. */
function adviceWords({ variable, score, level }: VerdictTask, rival: Rival): string {
  if (isLevel(variable)) {
    return isLevel(rival.name) || rival.high >= 0
      ? 'Neither needs a model: the level chosen here can be watched as it is.'
      : `The level chosen here can be watched as it is, but going by ${plainName(rival.name)} warns better.`;
  }
  if (isLevel(rival.name)) {
    return 'Watch the level then: rehearse again with a plain level as what to watch (--variable level).';
  }
  const limit = `A watch cannot be set on ${plainName(rival.name)}`;
  if (level !== null && level.skill >= score.skill!) {
    return `${limit}, but on the ${level.name}, whose skill is ${thousandths(level.skill)}: rehearse again with a plain level as what to watch (--variable level).`;
  }
  return `${limit}: go by that itself, or watch the ${variable} for the skill it has.`;
}

/** "distance from the mean" of "distance from the mean rising". */
const plainName = (name: string): string => name.replace(/ (rising|falling)$/, '');

function tooFewWords({ perHour, judgedShare, word }: VerdictTask, total: number): string {
  const rate = perHour * judgedShare;
  const missing = FEWEST_EVENTS - total;
  const hours =
    rate > 0 ? `; at this rate about ${spanWords((3600 * missing) / rate)} more of recording are needed` : '';
  return `Too few events: ${counted(total, word)} judged, at least ${FEWEST_EVENTS} are needed to say anything${hours}.`;
}

/** Why a watch with skill is still not called useful; null: nothing. */
function faultOf(task: VerdictTask): string | null {
  if (task.fittedOnJudged)
    return 'the model was fitted on data judged here, so this says nothing about new data';
  const cameTrue = task.score.cameTrue.value ?? 0;
  const few = cameTrue < 0.5 ? `only ${percent(cameTrue)} of the warnings came true, fewer than half` : null;
  return ceilingFault(task) ?? few;
}

/** How the judged part went beyond what was asked for; null: it did not. */
function ceilingFault({ score, ceiling }: VerdictTask): string | null {
  const { watchedSeconds } = score;
  const cameTrue = score.cameTrue.value ?? 0;
  const falsePerHour = score.falsePerHour.value ?? 0;
  if (ceiling.falsePerHour !== null && falsePerHour > ceiling.falsePerHour)
    return `${falseRateWords(falsePerHour, watchedSeconds)}, outside the ceiling of ${short(inUnit(ceiling.falsePerHour, rateUnitOf(watchedSeconds)))}`;
  if (ceiling.cameTrue !== null && cameTrue < ceiling.cameTrue)
    return `only ${percent(cameTrue)} of the warnings came true, outside the ceiling of ${percent(ceiling.cameTrue)}`;
  return null;
}

function usefulWords({ score, variable, rival, outside, levelChosenFreely }: VerdictTask): string {
  const { skill, cameTrue, pValue, skillShare } = score;
  const share = skillShare === null ? '' : ` (${percent(skillShare)} of what a perfect warner reaches)`;
  const beaten =
    rival === null
      ? 'no baseline could be judged beside it'
      : `${thousandths(rival.value)} more than ${rival.name}, 95 % interval ${thousandths(rival.low)} to ${thousandths(rival.high)}`;
  const beyond =
    outside === null
      ? ''
      : ` (${outside.name} has more, ${thousandths(outside.skill)}, but does not keep within what was asked for.)`;
  const plain =
    levelChosenFreely && isLevel(variable)
      ? ' A plain level is the answer: nothing made of the delay window does better.'
      : '';
  return `Useful: skill ${thousandths(skill!)}${share}, ${beaten}; ${percent(cameTrue.value)} of the warnings came true, p ${thousandths(pValue!)}.${beyond}${plain}`;
}
