import type { RehearsalRequest } from '../../shared-types/rehearsal.ts';
import type { RegimeRule } from '../../shared-types/watch.ts';
import { usualInterval } from '../signal/grid.ts';
import { InputError } from '../signal/inputError.ts';
import type { GradingSpans } from '../watch/grading.ts';
import { parseRegimeRule } from '../watch/regimeRuleText.ts';
import { cutBefore, spansOf } from './cut.ts';
import { type GriddedRecording, gridRecording, regimeChannelOf, seriesOf } from './gridded.ts';
import { leftOutSeries } from './leftOut.ts';
import { judgedFromTimes, scoredFromTime } from './parts.ts';
import type { RehearsalTask, TaskSeries } from './task.ts';
import { allOf, counted, short, spanWords } from './words.ts';

/** A rehearsal's recordings on their grid, parted into what may be chosen on and what is judged. */
export interface Prepared {
  interval: number;
  gapIntervals: number;
  channels: { channel: string; unit: string }[];
  regime: RegimeRule;
  regimeChannel: string | null;
  spans: GradingSpans;
  recordings: GriddedRecording[];
  /** seconds: where each recording's judged part begins (infinite: nowhere), and from where it is scored */
  judgedFrom: number[];
  scoredFrom: number[];
  /** the tuning parts, as if the recordings had ended there; all of them where nothing was set aside for tuning */
  tuning: GriddedRecording[];
  /** nothing was set aside for tuning: baselines are tuned on what is judged, in their favour */
  hindsight: boolean;
}

/** Windows shorter than this hold no rank worth the name. */
const SHORTEST_WINDOW = 4;

/**
 * Puts a task's recordings on the grid, finds their switches and parts them.
 *
 * @throws InputError in a sentence: BAD_REGIME, SPANS, BAD_RULE, NO_SUCH_CHANNEL, NO_VALUES, NOTHING_LEFT, NO_FULL_WINDOW,
 *         NO_SWITCH, NO_SWITCH_TO_TUNE, NO_SWITCH_TO_JUDGE
 */
export function prepareTask(task: RehearsalTask): Prepared {
  const { request, model } = task;
  const regime = readRegime(request.regime);
  const counting = task.recordings.map(leftOutSeries);
  checkValues(task, counting);
  const first = seriesOf(task.recordings[0]!.series, request.channels[0]!) as TaskSeries;
  const interval = model?.interval ?? task.interval ?? intervalOf(first);
  const gapIntervals = model?.gapIntervals ?? task.gapIntervals ?? 3;
  const spans = spansOf(request, interval);
  checkSpans(request, spans);
  checkRearm(request);
  const settings = {
    channels: request.channels,
    interval,
    gapIntervals,
    regime,
    regimeChannel: request.regimeChannel,
  };
  const recordings = counting.map((series) => gridRecording(series, settings));
  checkWindows(task, recordings, model?.delays ?? SHORTEST_WINDOW);
  const judgedFrom = judgedFromTimes(recordings, request.tunePart);
  const scoredFrom = recordings.map((one, i) => scoredFromTime(one, judgedFrom[i]!, spans));
  const parts = recordings.map((one, i) => cutBefore(one, judgedFrom[i]!)).filter((one) => one !== null);
  const hindsight = parts.length === 0 || request.tunePart === 0;
  const tuning = hindsight ? recordings : parts;
  checkSwitches(task, recordings, tuning, scoredFrom);
  const units = request.channels.map((channel) => ({
    channel,
    unit: (seriesOf(task.recordings[0]!.series, channel) as TaskSeries).unit ?? '',
  }));
  return {
    interval,
    gapIntervals,
    channels: units,
    regime,
    regimeChannel: request.regimeChannel,
    spans,
    recordings,
    judgedFrom,
    scoredFrom,
    tuning,
    hindsight,
  };
}

/**
 * The channels that a rehearsal reads: the watched ones, and the one its rule for a switch reads.
 *
 * @throws InputError BAD_REGIME
 */
export function channelsRead({ channels, regime, regimeChannel }: RehearsalRequest): string[] {
  return [...new Set([...channels, regimeChannelOf(readRegime(regime), regimeChannel, channels)])];
}

function readRegime(text: string): RegimeRule {
  try {
    return parseRegimeRule(text);
  } catch (error) {
    throw new InputError('BAD_REGIME', (error as Error).message);
  }
}

function intervalOf({ channel, times }: TaskSeries): number {
  if (times.length >= 2) return usualInterval(times);
  throw new InputError(
    'NO_FULL_WINDOW',
    `channel ${channel} has ${times.length} samples, expected a recording of many windows; record for longer`,
  );
}

function checkSpans({ leastLead, horizon }: RehearsalRequest, spans: GradingSpans): void {
  if (spans.horizon > spans.leastLead) return;
  throw new InputError(
    'SPANS',
    `the least lead (${spanWords(leastLead)}) is not shorter than the horizon (${spanWords(horizon)}) by at least one interval (${spanWords(spans.interval)}), so no warning could ever come true; lengthen the horizon or shorten the least lead`,
  );
}

/** A level may fall, and then re-arm lies above; which way is only known after the search. */
function checkRearm({ variable, threshold, rearm }: RehearsalRequest): void {
  if (variable === 'level' || threshold === null || rearm === null || rearm <= threshold) return;
  throw new InputError(
    'BAD_RULE',
    `re-arm (${rearm}) lies above the threshold (${threshold}), so the rule could warn without pause; lower it, to 0.8 times the threshold, say`,
  );
}

/** Every channel that is read must be in every recording and have some value that counts. */
function checkValues({ request, recordings }: RehearsalTask, counting: readonly TaskSeries[][]): void {
  for (const channel of channelsRead(request)) {
    recordings.forEach(({ name, series, leftOut }, i) => {
      const raw = series.find((one) => one.channel === channel);
      if (raw === undefined) {
        throw new InputError(
          'NO_SUCH_CHANNEL',
          `the recording ${name} has no channel ${channel}, it has ${series.map((one) => one.channel).join(', ')}; name one of these`,
        );
      }
      if (seriesOf(counting[i]!, channel).values.some(Number.isFinite)) return;
      if (!raw.values.some(Number.isFinite)) {
        throw new InputError(
          'NO_VALUES',
          `the recording ${name} has no value of ${channel} in ${counted(raw.values.length, 'sample')}, expected numbers; leave the recording out, or watch another channel`,
        );
      }
      throw new InputError(
        'NOTHING_LEFT',
        `marks and conditions leave nothing of ${channel} in the recording ${name} (${counted(leftOut.length, 'stretch')} left out), expected some of it to count; withdraw a mark or a condition, or choose another recording`,
      );
    });
  }
}

function checkWindows(
  { recordings }: RehearsalTask,
  gridded: readonly GriddedRecording[],
  delays: number,
): void {
  gridded.forEach(({ runs, interval }, i) => {
    const longest = Math.max(...runs.map(({ newest }) => newest.length));
    if (longest >= delays) return;
    throw new InputError(
      'NO_FULL_WINDOW',
      `the recording ${recordings[i]!.name} has no full window: its longest stretch without a gap is ${longest} samples, expected at least ${delays} (${spanWords(delays * interval)}); leave it out, record without gaps, or take a shorter window`,
    );
  });
}

function checkSwitches(
  task: RehearsalTask,
  recordings: readonly GriddedRecording[],
  tuning: readonly GriddedRecording[],
  scoredFrom: readonly number[],
): void {
  const { regime } = task.request;
  const total = recordings.reduce((sum, { switches }) => sum + switches.length, 0);
  if (total === 0) {
    throw new InputError(
      'NO_SWITCH',
      `the rule ${regime} never finds a switch in these recordings${rangeWords(task)}; choose levels that the signal passes, or record until it switches`,
    );
  }
  const tuned = tuning.reduce((sum, { switches }) => sum + switches.length, 0);
  if (tuned === 0) {
    throw new InputError(
      'NO_SWITCH_TO_TUNE',
      `no switch lies in the tuning part (${allOf(total, 'switch')} ${total === 1 ? 'comes' : 'come'} later), expected several to choose settings by; raise --tune-part or give longer recordings`,
    );
  }
  const judged = recordings.reduce(
    (sum, { switches, interval }, i) =>
      sum + switches.filter(({ at }) => at >= scoredFrom[i]! - interval / 2).length,
    0,
  );
  if (judged === 0) {
    throw new InputError(
      'NO_SWITCH_TO_JUDGE',
      `${allOf(total, 'switch')} ${total === 1 ? 'lies' : 'lie'} in the tuning part or within a horizon after it, so none is left to judge, expected at least 10; lower --tune-part or give longer recordings`,
    );
  }
}

function rangeWords({ request, recordings }: RehearsalTask): string {
  const channel = regimeChannelOf(readRegime(request.regime), request.regimeChannel, request.channels);
  let low = Number.POSITIVE_INFINITY;
  let high = Number.NEGATIVE_INFINITY;
  for (const { series } of recordings) {
    for (const value of seriesOf(series, channel).values) {
      if (value < low) low = value;
      if (value > high) high = value;
    }
  }
  if (!(low <= high)) return '';
  return ` (${channel} lies between ${short(low)} and ${short(high)})`;
}
