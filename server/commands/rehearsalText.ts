import type { Model } from '../../shared-types/model.ts';
import type { Interval, Score } from '../../shared-types/score.ts';
import type { Recording } from '../recordings/recording.ts';
import type { Rehearsal, RehearsedWarning } from '../rehearsal/rehearse.ts';
import type { WatchSettings } from '../watch/types.ts';

/** Below this a recording has elapsed time, not the time of a clock. */
const CLOCK_TIME = 1e8;

/** Whether the model was fitted on data that this rehearsal judges: then the score says nothing about new data. */
export function fittedOnJudged(
  model: Model,
  recordings: readonly Recording[],
  rehearsal: Rehearsal,
): boolean {
  return recordings.some(({ name, sha256, channels }, i) => {
    const end = Math.max(...channels.map(({ times }) => times.at(-1) ?? Number.NEGATIVE_INFINITY));
    const judgedFrom = rehearsal.judgedFrom[i]!;
    return model.provenance.recordings.some(
      (used) =>
        (used.sha256 === sha256 || used.name === name) &&
        Math.min(used.to, end) > judgedFrom + 2 * model.interval &&
        judgedFrom <= end,
    );
  });
}

/** What `rehearse --json` prints. */
export function jsonOfRehearsal(
  { model, channels, rule, regime, regimeChannel }: WatchSettings,
  recordings: readonly Recording[],
  { switches, warnings, score, judgedFrom }: Rehearsal,
  seen: boolean,
): object {
  const named = <T extends { recording: number }>(list: T[]) =>
    list.map(({ recording, ...rest }) => ({ recording: recordings[recording]!.name, ...rest }));
  return {
    recordings: recordings.map(({ name, sha256 }, i) => ({
      name,
      sha256,
      judgedFrom: Number.isFinite(judgedFrom[i]) ? judgedFrom[i] : null,
    })),
    switches: named(switches),
    warnings: named(warnings),
    score,
    settings: {
      model: model.name,
      channels,
      interval: model.interval,
      delays: model.delays,
      rank: model.rank,
      ...rule,
      regime,
      regimeChannel,
    },
    fittedOnJudged: seen,
  };
}

/** The rehearsal in words: one sentence first, then the score, then every warning. */
export function describeRehearsal(
  settings: WatchSettings,
  recordings: readonly Recording[],
  rehearsal: Rehearsal,
  seen: boolean,
): string {
  const { model } = settings;
  const { score, warnings } = rehearsal;
  const lines = [headline(settings, score), ...scoreLines(score, model.switchWord)];
  if (seen) {
    lines.push(
      'The model was fitted on data judged here, so this says nothing about new data; raise --tune-part.',
    );
  }
  lines.push('', ...warningLines(warnings, recordings));
  return `${lines.join('\n')}\n`;
}

function headline(
  { rule, model }: WatchSettings,
  { switches, detection, lead, falsePerHour }: Score,
): string {
  const counted = switches.warned + switches.late + switches.missed;
  const side = rule!.direction === 'falling' ? 'below' : 'above';
  const unit = rule!.variable === 'forcing' ? 'sd' : model.channels[0]!.unit;
  const variable = rule!.variable === 'forcing' ? 'Forcing' : 'The level';
  const watch = `${variable} ${side} ${round(rule!.threshold, 2)} ${unit}`.trimEnd();
  if (counted === 0) return `${watch}: no ${model.switchWord} in the judged part could have been warned of.`;
  const parts = [
    `${watch} warned ${switches.warned} of ${counted} ${model.switchWord}${counted === 1 ? '' : 's'}`,
    `95 % interval ${percent(detection.low)} to ${percent(detection.high)} %`,
  ];
  if (lead.median !== null) parts.push(`median lead ${round(lead.median, 1)} s`);
  if (falsePerHour.value !== null) parts.push(`${round(falsePerHour.value, 1)} false warnings an hour`);
  return `${parts.join(', ')}.`;
}

function scoreLines(score: Score, word: string): string[] {
  const { warnings, switches, lead } = score;
  const leads = [lead.p10, lead.median, lead.p90].map((value) => round(value, 1)).join(' / ');
  return [
    `judged            ${round(score.watchedSeconds / 3600, 2)} h with a full window`,
    `${`${word}s`.padEnd(17)} ${switches.total}: ${listed({ ...switches, total: 0 })}`,
    `warnings          ${warnings.total}: ${listed({ ...warnings, total: 0 })}`,
    `came true         ${shareOf(score.cameTrue)}`,
    `false             ${shareOf(score.falseRatio)}; an hour ${round(score.falsePerHour.low, 1)} to ${round(score.falsePerHour.high, 1)}`,
    `lead              ${leads} s (10 %, median, 90 %); a warner that knows nothing: ${round(lead.random, 1)} s`,
    `skill             ${round(score.skill, 2)} above chance (${percent(score.tau)} % of the time in a span), p ${round(score.pValue, 3)}; ` +
      shareWords(score),
  ];
}

function shareWords({ skill, skillShare }: Score): string {
  if (skillShare !== null) return `${percent(skillShare)} % of what a perfect warner reaches`;
  if (skill === null) return 'nothing to compare with';
  return 'the horizon is too long for such frequent switches, even a perfect warner would have little skill';
}

function warningLines(warnings: readonly RehearsedWarning[], recordings: readonly Recording[]): string[] {
  if (warnings.length === 0) return ['no warnings'];
  const lines = ['at                        value  outcome  lead    part'];
  let recording = -1;
  for (const warning of warnings) {
    if (recordings.length > 1 && warning.recording !== recording) {
      lines.push(recordings[warning.recording]!.name);
      recording = warning.recording;
    }
    const lead = warning.lead === null ? '' : `${round(warning.lead, 2)} s`;
    lines.push(
      `${timeText(warning.at).padEnd(24)} ${round(warning.value, 2).padStart(6)}  ${warning.outcome.padEnd(8)} ${lead.padEnd(7)} ${warning.part}`,
    );
  }
  return lines;
}

const timeText = (time: number): string =>
  time < CLOCK_TIME ? `${time.toFixed(3)} s` : new Date(time * 1000).toISOString();

const round = (value: number | null, digits: number): string =>
  value === null ? '–' : value.toFixed(digits);

const percent = (value: number | null): string => (value === null ? '–' : (100 * value).toFixed(0));

const shareOf = ({ value, low, high }: Interval): string =>
  value === null
    ? 'nothing counted'
    : `${percent(value)} % (95 % interval ${percent(low)} to ${percent(high)} %)`;

function listed(counts: { [outcome: string]: number }): string {
  const parts = Object.entries(counts).filter(([, count]) => count > 0);
  return parts.map(([outcome, count]) => `${count} ${outcome}`).join(', ') || 'none';
}
