import type { Model } from '../../shared-types/model.ts';
import { type RehearsalRequest, VariableChoice } from '../../shared-types/rehearsal.ts';
import type { RegimeRule, WatchRule } from '../../shared-types/watch.ts';
import { InputError } from '../signal/inputError.ts';
import { regimeRuleText } from '../watch/regimeRuleText.ts';
import { steppedRule, watchRuleWithDefaults } from '../watch/watchRule.ts';
import { numberOption, type OptionValues, readRegime, readRuleOptions, wholeOption } from './options.ts';

/** What is rehearsed, and the model with its rule when one was given. */
export interface RequestOfOptions {
  request: RehearsalRequest;
  model: Model | null;
}

/**
 * The request of a search for settings.
 *
 * @throws InputError when the options do not say enough
 */
export function searchRequest(recordings: string[], values: OptionValues): RequestOfOptions {
  const channels = values.channel as string[] | undefined;
  if (channels === undefined) {
    throw new InputError(
      'NO_CHANNEL',
      'no channel and no model is named, expected the channel to watch or a model to rehearse; add --channel NAME, or --model MODEL.json',
    );
  }
  const rule = readRuleOptions(values);
  if (rule === null) {
    throw new InputError(
      'RULE_INCOMPLETE',
      'nothing says what a switch is, expected --regime, --least-lead and --horizon; add them, for example --regime sides:-0.8,0.8 --least-lead 10 --horizon 20',
    );
  }
  const request = {
    ...commonOptions(recordings, values),
    ...rule,
    channels,
    regime: regimeRuleText(rule.regime),
    variable: variableOption(values),
    tunePart: partOption(values, true),
  };
  return { request, model: null };
}

/**
 * The request of judging a model, whose rules the options replace where they are given.
 *
 * @throws InputError when the options contradict themselves or the model
 */
export function givenRequest(model: Model, recordings: string[], values: OptionValues): RequestOfOptions {
  if (values.variable !== undefined) {
    throw new InputError(
      'BAD_OPTION',
      `--variable ${String(values.variable)} belongs to the search for settings, a model has its own variable; leave --variable or --model out`,
    );
  }
  const channels = channelsOf(model, values);
  const rule = ruleOf(model, values);
  const regime = needRegime(values.regime === undefined ? model.regime : readRegime(String(values.regime)));
  const { variable, leastLead, horizon, threshold, rearm, onDelay, holdOff } = rule;
  const request = {
    ...commonOptions(recordings, values),
    channels,
    regime: regimeRuleText(regime),
    regimeChannel: regimeChannelOf(model, channels, values),
    variable,
    leastLead,
    horizon,
    threshold,
    rearm,
    onDelay,
    holdOff,
    tunePart: partOption(values, false),
  };
  return { request, model: { ...model, rule } };
}

function commonOptions(recordings: string[], values: OptionValues) {
  const cameTrue = numberOption(values, 'come-true', 0);
  if (cameTrue !== null && cameTrue > 1) {
    throw new InputError(
      'BAD_OPTION',
      `--come-true is ${cameTrue}, expected a share from 0 to 1; write --come-true 0.8 for 80 %`,
    );
  }
  return {
    recordings,
    ceiling: { falsePerHour: numberOption(values, 'false-per-hour', 0), cameTrue },
    delay: numberOption(values, 'delay', 0) ?? 0,
    seed: wholeOption(values, 'seed', 0) ?? 1,
    windows: null,
    ranks: null,
  };
}

function variableOption({ variable = 'best' }: OptionValues): VariableChoice {
  if (variable === 'prospect') {
    throw new InputError(
      'BAD_OPTION',
      '--variable prospect is not made by this version, expected forcing, level or best; leave it out for best',
    );
  }
  const read = VariableChoice.safeParse(variable);
  if (read.success) return read.data;
  throw new InputError(
    'BAD_OPTION',
    `--variable is "${String(variable)}", expected forcing, level or best; leave it out for best`,
  );
}

function channelsOf(model: Model, values: OptionValues): string[] {
  const channels = (values.channel as string[] | undefined) ?? model.channels.map(({ channel }) => channel);
  if (channels.length === model.channels.length) return channels;
  throw new InputError(
    'CHANNELS',
    `--channel names ${channels.length}, the model has ${model.channels.length} channels; name one for each of ` +
      model.channels.map(({ channel }) => channel).join(', '),
  );
}

/** The channel of the options, or the model's: one of its own channels goes by the name it has in the recording. */
function regimeChannelOf(model: Model, channels: string[], values: OptionValues): string | null {
  if (values['regime-channel'] !== undefined) return String(values['regime-channel']);
  const own = model.channels.findIndex(({ channel }) => channel === model.regimeChannel);
  return own === -1 ? model.regimeChannel : channels[own]!;
}

function needRegime(regime: RegimeRule | null): RegimeRule {
  if (regime !== null) return regime;
  throw new InputError(
    'RULE_INCOMPLETE',
    'neither the model nor the options say what a switch is, expected a rule; add --regime, for example --regime sides:-0.8,0.8',
  );
}

/** The model's own rule with what the options replace; re-arm and hold-off follow by default where theirs was replaced. */
function ruleOf({ rule: own, interval }: Model, values: OptionValues): WatchRule {
  const need = (name: string, from: number | undefined): number => {
    const value = numberOption(values, name, name === 'threshold' ? undefined : 0) ?? from;
    if (value !== undefined) return value;
    throw new InputError(
      'RULE_INCOMPLETE',
      `neither the model nor the options give --${name}, a rule needs it; add --${name}, or fit the model with rule options`,
    );
  };
  const threshold = need('threshold', own?.threshold);
  const leastLead = need('least-lead', own?.leastLead);
  const horizon = need('horizon', own?.horizon);
  const spansKept = values['least-lead'] === undefined && values.horizon === undefined;
  const rearm = numberOption(values, 'rearm') ?? (values.threshold === undefined ? own?.rearm : undefined);
  const holdOff = numberOption(values, 'hold-off', 0) ?? (spansKept ? own?.holdOff : undefined);
  const rule = watchRuleWithDefaults({
    variable: own?.variable ?? 'forcing',
    direction: own?.direction ?? 'rising',
    threshold,
    onDelay: numberOption(values, 'on-delay', 0) ?? own?.onDelay ?? 0,
    leastLead,
    horizon,
    ...(rearm === undefined ? {} : { rearm }),
    ...(holdOff === undefined ? {} : { holdOff }),
  });
  try {
    steppedRule(rule, interval);
  } catch (error) {
    throw new InputError('BAD_RULE', (error as Error).message);
  }
  return rule;
}

/** The share for tuning; a search needs some of it on either side, a given model none. */
function partOption(values: OptionValues, search: boolean): number {
  const part = numberOption(values, 'tune-part', 0) ?? 0.5;
  if (search ? part >= 0.1 && part <= 0.9 : part < 1) return part;
  throw new InputError(
    'BAD_OPTION',
    `--tune-part is ${part}, expected a share ${search ? 'from 0.1 to 0.9' : 'from 0 to below 1'}; write --tune-part 0.5`,
  );
}
