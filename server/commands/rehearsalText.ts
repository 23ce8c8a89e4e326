import type { Model } from '../../shared-types/model.ts';
import type { Contender, RehearsalResult } from '../../shared-types/rehearsal.ts';
import type { Interval, Score } from '../../shared-types/score.ts';
import type { Rehearsal, RehearsedWarning } from '../rehearsal/rehearse.ts';
import { counted, inUnit, percent, pluralOf, rateUnitOf, short, spanWords } from '../rehearsal/words.ts';

/** A recording that begins below this has elapsed time, not the time of a clock. */
const CLOCK_TIME = 1e8;

/** After a search so many warnings are printed line by line; of a given watch all are what was asked for. */
const MOST_LISTED = 40;

/** What `rehearse --json` prints. */
export function jsonOfRehearsal(
  result: RehearsalResult,
  model: Model,
  { switches, warnings, judgedFrom }: Rehearsal,
): object {
  const { recordings, contenders, request, settings } = result;
  const named = <T extends { recording: number }>(list: T[]) =>
    list.map(({ recording, ...rest }) => ({ recording: recordings[recording]!.name, ...rest }));
  const byName = (list: Contender[]) =>
    Object.fromEntries(list.map(({ name, kind: _kind, curve: _curve, ...rest }) => [name, rest]));
  return {
    sentence: result.sentence,
    verdict: result.verdict,
    recordings: recordings.map((one, i) => ({
      ...one,
      judgedFrom: Number.isFinite(judgedFrom[i]) ? judgedFrom[i] : null,
    })),
    switches: named(switches),
    warnings: named(warnings),
    score: result.score,
    variables: byName(contenders.filter(({ kind }) => kind === 'variable')),
    baselines: byName(contenders.filter(isBaseline)),
    settings: {
      model: model.name,
      channels: request.channels,
      ...settings,
      regime: model.regime,
      regimeChannel: model.regimeChannel,
    },
    weak: result.weak,
    tried: result.tried,
    pairs: result.pairs,
    fittedOnJudged: fittedOnJudged(result),
    leftOut: named(result.leftOut),
    seconds: result.seconds,
    program: result.program,
    at: result.at,
  };
}

/** The plain levels are variables of a watch and baselines as well. */
const isBaseline = ({ kind, name }: Contender): boolean => kind === 'baseline' || name.startsWith('level ');

/** Whether the verdict had to say that the model was fitted on what is judged. */
const fittedOnJudged = (result: RehearsalResult): boolean => result.fittedOnJudged;

/** The rehearsal in words: the answer first, then the verdict, the score, who else was tried, and every warning. */
export function describeRehearsal(result: RehearsalResult, model: Model, { warnings }: Rehearsal): string {
  const { score, settings, tried, contenders, recordings } = result;
  const lines = [
    result.sentence,
    result.verdict.sentence,
    '',
    settingsLine(settings),
    ...(tried > 1 ? [`tried             ${tried} settings, chosen on the part before`] : []),
    ...scoreLines(score, model.switchWord),
  ];
  if (fittedOnJudged(result)) {
    lines.push(
      'The model was fitted on data judged here, so this says nothing about new data; raise --tune-part.',
    );
  }
  lines.push('', ...contenderLines(contenders), '');
  lines.push(...warningLines(warnings, recordings, tried > 1 ? MOST_LISTED : Number.POSITIVE_INFINITY));
  return `${lines.join('\n')}\n`;
}

function settingsLine({
  window,
  delays,
  rank,
  rearm,
  onDelay,
  holdOff,
}: RehearsalResult['settings']): string {
  const parts = [
    `window ${spanWords(window)} (${delays} delays)`,
    `rank ${rank}`,
    `re-arm ${short(rearm)}`,
    `on-delay ${spanWords(onDelay)}`,
    `hold-off ${spanWords(holdOff)}`,
  ];
  return `settings          ${parts.join(', ')}`;
}

function contenderLines(contenders: readonly Contender[]): string[] {
  const rows = contenders.map(({ name, settings, skill, detection, cameTrue }) =>
    [
      name.padEnd(30),
      round(skill, 2).padStart(6),
      percent(detection).padStart(9),
      percent(cameTrue).padStart(11),
      `   ${settings}`,
    ]
      .join('')
      .trimEnd(),
  );
  return [`${'variable or baseline'.padEnd(30)} skill   warned  came true   set to`, ...rows];
}

function scoreLines(score: Score, word: string): string[] {
  const { warnings, switches, lead, watchedSeconds, falsePerHour } = score;
  const unit = rateUnitOf(watchedSeconds);
  const rate = (perHour: number | null) => (perHour === null ? '–' : short(inUnit(perHour, unit)));
  return [
    `judged            ${spanWords(watchedSeconds)} with a full window`,
    `${pluralOf(word).padEnd(17)} ${switches.total}: ${listed({ ...switches, total: 0 })}`,
    `warnings          ${warnings.total}: ${listed({ ...warnings, total: 0 })}`,
    `came true         ${shareOf(score.cameTrue)}`,
    `false             ${shareOf(score.falseRatio)}; ${rate(falsePerHour.value)} ${unit.words} (${rate(falsePerHour.low)} to ${rate(falsePerHour.high)})`,
    ...leadLines(lead),
    `skill             ${round(score.skill, 2)} above chance (${percent(score.tau)} of the time in a span), p ${round(score.pValue, 3)}; ` +
      shareWords(score),
  ];
}

function leadLines({ p10, median, p90, random }: Score['lead']): string[] {
  if (p10 === null || median === null || p90 === null) return ['lead              no switch was warned of'];
  const nothing = random === null ? '' : `; a warner that knows nothing: ${spanWords(random)}`;
  return [
    `lead              median ${spanWords(median)}, ${spanWords(p10)} to ${spanWords(p90)} (10 to 90 %)${nothing}`,
  ];
}

function shareWords({ skill, skillShare }: Score): string {
  if (skillShare !== null) return `${percent(skillShare)} of what a perfect warner reaches`;
  if (skill === null) return 'nothing to compare with';
  return 'the horizon is too long for such frequent switches, even a perfect warner would have little skill';
}

function warningLines(
  warnings: readonly RehearsedWarning[],
  recordings: RehearsalResult['recordings'],
  most: number,
): string[] {
  if (warnings.length === 0) return ['no warnings'];
  const shown = warnings.slice(Math.max(0, warnings.length - most));
  const left = warnings.length - shown.length;
  const rest = left === 0 ? '' : `, the last ${most} (--json has them all)`;
  const lines = [
    `${counted(warnings.length, 'warning')}${rest}:`,
    'at                        value  outcome  lead       part',
  ];
  let recording = -1;
  for (const warning of shown) {
    if (recordings.length > 1 && warning.recording !== recording) {
      lines.push(recordings[warning.recording]!.name);
      recording = warning.recording;
    }
    const lead = warning.lead === null ? '' : spanWords(warning.lead);
    lines.push(
      `${timeText(warning.at, recordings[warning.recording]!.from).padEnd(24)} ${round(warning.value, 2).padStart(6)}  ${warning.outcome.padEnd(8)} ${lead.padEnd(10)} ${warning.part}`,
    );
  }
  return lines;
}

const timeText = (time: number, begins: number): string =>
  begins < CLOCK_TIME ? `${time.toFixed(3)} s` : new Date(time * 1000).toISOString();

const round = (value: number | null, digits: number): string =>
  value === null ? '–' : value.toFixed(digits).replace(/^-(0\.?0*)$/, '$1');

const shareOf = ({ value, low, high }: Interval): string =>
  value === null
    ? 'nothing counted'
    : `${percent(value)} (95 % interval ${percent(low)} to ${percent(high)})`;

function listed(counts: { [outcome: string]: number }): string {
  const parts = Object.entries(counts).filter(([, count]) => count > 0);
  return parts.map(([outcome, count]) => `${count} ${outcome}`).join(', ') || 'none';
}
