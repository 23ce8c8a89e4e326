import type { ModelEvidence, ModelSummary } from '../../shared-types/model.ts';
import type { Score } from '../../shared-types/score.ts';
import type { WatchRule, WatchState } from '../../shared-types/watch.ts';
import { thresholdText } from '../warningWords.ts';
import { intervalText, numberText, plural, spanText } from '../words.ts';

/** "forcing above 1.47 sd, for 10 to 20 s ahead"; what a model without a rule does. */
export function ruleText(rule: WatchRule | null, unit: string): string {
  if (rule === null) return 'no watch rule: drawn, never warns';
  const side = rule.direction === 'falling' ? 'below' : 'above';
  const ahead = `${numberText(rule.leastLead, decimals(rule.leastLead))} to ${spanText(rule.horizon)} ahead`;
  return `${rule.variable} ${side} ${thresholdText(rule.threshold, rule.variable, unit)}, ${ahead}`;
}

const decimals = (value: number) => (Number.isInteger(value) ? 0 : 1);

/** What rehearsal promised, in one line: "98 of 100 warned, 97 of 100 came true, usual lead 15 s"; null without a score. */
export function promiseLine(score: Score | null, word: string): string | null {
  if (score === null) return null;
  const share = (value: number | null) => (value === null ? 'none' : `${Math.round(100 * value)} of 100`);
  const lead = score.lead.median === null ? '' : `, usual lead ${spanText(score.lead.median)}`;
  return `${share(score.detection.value)} ${plural(word)} warned, ${share(score.cameTrue.value)} warnings came true${lead}`;
}

/** A figure of the score with its interval, row by row: name, figure, interval. */
export function scoreRows(score: Score, word: string): [name: string, figure: string, interval: string][] {
  const share = (value: number | null) => (value === null ? '–' : `${Math.round(100 * value)} %`);
  const rate = score.falsePerHour;
  const rateRange =
    rate.low === null || rate.high === null ? '' : `95 % interval ${short(rate.low)} to ${short(rate.high)}`;
  return [
    [`${capitalPlural(word)} warned`, share(score.detection.value), intervalText(score.detection) ?? ''],
    ['Warnings that came true', share(score.cameTrue.value), intervalText(score.cameTrue) ?? ''],
    ['False warnings an hour', rate.value === null ? '–' : short(rate.value), rateRange],
    ['Usual lead', score.lead.median === null ? '–' : spanText(score.lead.median), leadRange(score)],
    ['Skill', score.skill === null ? '–' : numberText(score.skill, 2), perfectText(score)],
  ];
}

const short = (value: number) => String(Number(value.toPrecision(3)));
const capitalPlural = (word: string) => plural(word).replace(/^./, (letter) => letter.toUpperCase());

const leadRange = ({ lead: { p10, p90 } }: Score): string =>
  p10 === null || p90 === null ? '' : `8 of 10 between ${spanText(p10)} and ${spanText(p90)}`;

const perfectText = ({ skillShare }: Score): string =>
  skillShare === null ? '' : `${Math.round(100 * skillShare)} % of what a perfect warner has`;

/** Who uses a model, in words: "Loop A: in use; Loop B: on trial"; "not used". */
export function usesText(model: string, watches: readonly WatchState[]): string {
  const using = watches.filter((watch) => watch.model === model && watch.use !== 'taken out of use');
  if (using.length === 0) return 'not used';
  return using.map(({ channels, use }) => `${channels.join(' + ')}: ${use}`).join('; ');
}

/** The models in the order of the list: those in use first, then by their time, newest first. */
export function inOrder(
  models: readonly ModelSummary[],
  watches: readonly WatchState[],
): readonly ModelSummary[] {
  const rank = ({ name }: ModelSummary) => {
    const uses = watches.filter(({ model }) => model === name).map(({ use }) => use);
    return uses.includes('in use') ? 0 : uses.includes('on trial') ? 1 : 2;
  };
  return [...models].sort((a, b) => rank(a) - rank(b) || b.fittedAt.localeCompare(a.fittedAt));
}

/** How far the forcing departs from a Gaussian, as a sentence. */
export function forcingText({ kurtosis, share }: ModelEvidence['diagnostics']['forcing']): string {
  const tail =
    kurtosis > 1
      ? 'it is quiet for long and bursts now and then'
      : kurtosis < -0.5
        ? 'it has shorter tails than noise: it swings rather than bursts'
        : 'its tails are about those of noise';
  return `Excess kurtosis ${numberText(kurtosis, 1)}; beyond 2 sd for ${numberText(100 * share, 1)} % of the time (a Gaussian: 4.6 %): ${tail}.`;
}

/** How the linear model does on data it was not fitted on, as a sentence. */
export function heldOutText(heldOut: ModelEvidence['diagnostics']['heldOut'], window: number): string {
  if (heldOut === null) return 'The recording was too short to hold a part of it back.';
  const { freeRunCorrelation: correlation } = heldOut;
  return `Run freely for one window (${spanText(window)}) from the held-out fifth, with the measured forcing, it correlates ${numberText(correlation, 2)} with what was measured.`;
}
