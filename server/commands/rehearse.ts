import { readFile } from 'node:fs/promises';
import { parseArgs } from 'node:util';
import type { Model } from '../../shared-types/model.ts';
import type { RegimeRule, WatchRule } from '../../shared-types/watch.ts';
import { modelFromJson } from '../model/modelFile.ts';
import { readRecording } from '../recordings/readRecording.ts';
import type { Recording } from '../recordings/recording.ts';
import { type Rehearsal, rehearse as rehearseWatch } from '../rehearsal/rehearse.ts';
import { createRandom } from '../rigs/random.ts';
import { InputError } from '../signal/inputError.ts';
import type { WatchSettings } from '../watch/types.ts';
import { steppedRule } from '../watch/watchRule.ts';
import {
  numberOption,
  printJson,
  readRegime,
  ruleOptions,
  ruleOptionsHelp,
  runCommand,
  wholeOption,
} from './options.ts';
import { describeRehearsal, fittedOnJudged, jsonOfRehearsal } from './rehearsalText.ts';

const HELP = `foreshift rehearse RECORDING... --model MODEL.json [options]

Runs a watch over recordings as if live and scores what it says: RECORDING is a CSV file or stored:NAME.

  --model MODEL.json     the watch to rehearse; rule options replace its own
  --channel NAME         channel of the recording (default: the model's); again for a model of several
  --delay S              seconds until a warning reaches who acts on it; taken off the leads (default: 0)
  --tune-part F          share that is not judged, of the time, or of four or more recordings (default: 0.5)
  --seed N               of the circular shifts behind the p-value (default: 1)
  --data DIR             data folder for stored:NAME (or FORESHIFT_DATA)
  --json                 print one JSON document

${ruleOptionsHelp.replace('chosen on the recording', "the model's own")}

example:
  foreshift rehearse run2.csv --model loop-a.json --tune-part 0
`;

const OPTIONS = {
  model: { type: 'string' },
  channel: { type: 'string', multiple: true },
  delay: { type: 'string' },
  'tune-part': { type: 'string' },
  seed: { type: 'string' },
  data: { type: 'string' },
  json: { type: 'boolean' },
  help: { type: 'boolean', short: 'h' },
  variable: { type: 'string' },
  'false-per-hour': { type: 'string' },
  'come-true': { type: 'string' },
  out: { type: 'string' },
  report: { type: 'string' },
  ...ruleOptions,
} as const;

/** Options of the search for settings, which this version does not make. */
const OF_THE_SEARCH = ['variable', 'false-per-hour', 'come-true', 'out', 'report'] as const;

type Values = { [name: string]: string | boolean | (string | boolean)[] | undefined };

/** `foreshift rehearse`: runs a given watch over recordings, lists its warnings and its score; returns the exit code. */
export function rehearse(argv: string[]): Promise<number> {
  return runCommand('rehearse', async () => {
    const { values, positionals } = parseArgs({ args: argv, options: OPTIONS, allowPositionals: true });
    if (values.help) {
      process.stdout.write(HELP);
      return 0;
    }
    refuseSearch(values);
    const model = await readModel(values.model);
    const recordings = await readRecordings(positionals, values.data);
    const settings = settingsOf(model, values);
    const tunePart = partOption(values);
    const rehearsal = rehearseWatch(
      settings,
      recordings.map(({ channels }) => channels),
      {
        tunePart,
        delay: numberOption(values, 'delay', 0) ?? 0,
        uniform: createRandom(wholeOption(values, 'seed', 0) ?? 1).uniform,
      },
    );
    report(model, settings, recordings, rehearsal, values.json === true);
    return 0;
  });
}

function report(
  model: Model,
  settings: WatchSettings,
  recordings: Recording[],
  rehearsal: Rehearsal,
  json: boolean,
): void {
  const seen = fittedOnJudged(model, recordings, rehearsal);
  if (json) printJson(jsonOfRehearsal(settings, recordings, rehearsal, seen));
  else process.stdout.write(describeRehearsal(settings, recordings, rehearsal, seen));
}

function refuseSearch(values: Values): void {
  const asked = OF_THE_SEARCH.find((name) => values[name] !== undefined);
  if (asked === undefined) return;
  throw new InputError(
    'NO_SEARCH',
    `--${asked} belongs to the search for settings, which this version does not make; leave it out and give --model with the rule to rehearse`,
  );
}

async function readModel(file: string | undefined): Promise<Model> {
  if (file === undefined) {
    throw new InputError(
      'NO_MODEL',
      'no model is named, expected the one to rehearse; add --model MODEL.json, as foreshift fit writes it',
    );
  }
  const text = await readFile(file, 'utf8').catch((error: NodeJS.ErrnoException) => {
    throw new InputError(
      'NO_MODEL',
      `the model file ${file} cannot be read (${error.code}), expected one that foreshift fit wrote; check the path`,
    );
  });
  return modelFromJson(text);
}

async function readRecordings(names: string[], data: string | undefined): Promise<Recording[]> {
  if (names.length === 0) {
    throw new InputError(
      'NO_RECORDING',
      'no recording is named, expected at least one; write foreshift rehearse RECORDING.csv --model MODEL.json',
    );
  }
  const recordings: Recording[] = [];
  for (const name of names) recordings.push(await readRecording(name, { data }));
  return recordings;
}

function settingsOf(model: Model, values: Values): WatchSettings {
  const named = values.channel as string[] | undefined;
  const channels = named ?? model.channels.map(({ channel }) => channel);
  if (channels.length !== model.channels.length) {
    throw new InputError(
      'CHANNELS',
      `--channel names ${channels.length}, the model has ${model.channels.length} channels; name one for each of ` +
        model.channels.map(({ channel }) => channel).join(', '),
    );
  }
  const regime = values.regime === undefined ? model.regime : readRegime(String(values.regime));
  const own =
    model.regimeChannel === null
      ? -1
      : model.channels.findIndex(({ channel }) => channel === model.regimeChannel);
  const regimeChannel =
    values['regime-channel'] === undefined
      ? own === -1
        ? model.regimeChannel
        : channels[own]!
      : String(values['regime-channel']);
  return { model, channels, rule: ruleOf(model, values), regime: needRegime(regime), regimeChannel };
}

function needRegime(regime: RegimeRule | null): RegimeRule {
  if (regime !== null) return regime;
  throw new InputError(
    'RULE_INCOMPLETE',
    'neither the model nor the options say what a switch is, expected a rule; add --regime, for example --regime sides:-0.8,0.8',
  );
}

/** The model's own rule with what the options replace; re-arm and hold-off follow by default where theirs was replaced. */
function ruleOf({ rule: own, interval }: Model, values: Values): WatchRule {
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
  const kept = own !== null && values.threshold === undefined ? own.rearm : 0.8 * threshold;
  const rule: WatchRule = {
    variable: own?.variable ?? 'forcing',
    direction: own?.direction ?? 'rising',
    threshold,
    rearm: numberOption(values, 'rearm') ?? kept,
    onDelay: numberOption(values, 'on-delay', 0) ?? own?.onDelay ?? 0,
    holdOff:
      numberOption(values, 'hold-off', 0) ?? (own !== null && spansKept ? own.holdOff : horizon - leastLead),
    leastLead,
    horizon,
  };
  try {
    steppedRule(rule, interval);
  } catch (error) {
    throw new InputError('BAD_RULE', (error as Error).message);
  }
  return rule;
}

function partOption(values: Values): number {
  const part = numberOption(values, 'tune-part', 0) ?? 0.5;
  if (part < 1) return part;
  throw new InputError(
    'BAD_OPTION',
    `--tune-part is ${part}, expected a share from 0 to below 1; write --tune-part 0.5`,
  );
}
