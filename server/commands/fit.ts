import { writeFile } from 'node:fs/promises';
import { parseArgs } from 'node:util';
import type { Model } from '../../shared-types/model.ts';
import type { RegimeRule } from '../../shared-types/watch.ts';
import { fitModel } from '../model/fit.ts';
import { modelToJson } from '../model/modelFile.ts';
import { summarise } from '../model/summary.ts';
import { cutRange } from '../recordings/cutRange.ts';
import { pickChannel } from '../recordings/pickChannel.ts';
import { readRecording } from '../recordings/readRecording.ts';
import type { RecordedChannel, Recording } from '../recordings/recording.ts';
import { chooseRule, scoreOfChoice } from '../rehearsal/modelRule.ts';
import type { RehearsalTask } from '../rehearsal/task.ts';
import { usualInterval } from '../signal/grid.ts';
import { InputError } from '../signal/inputError.ts';
import { leaveOut } from '../signal/leaveOut.ts';
import { regimeRuleText } from '../watch/regimeRuleText.ts';
import {
  numberOption,
  printJson,
  type RuleChoice,
  readRegime,
  readRuleOptions,
  ruleOptions,
  ruleOptionsHelp,
  runCommand,
  watchRuleOf,
  wholeOption,
} from './options.ts';
import { programName } from './program.ts';
import { runsOf } from './trainingRuns.ts';

const HELP = `foreshift fit RECORDING... --channel NAME [options] --out MODEL.json

Fits a model to recordings: a file's path, or stored:NAME for what the store holds.

  --channel NAME         channel to fit; given again for a model of several channels
  --delays Q             samples in the delay window, or
  --window SECONDS       its length (default: first minimum of the average mutual information)
  --rank R               coordinates; the last one is the forcing (default: from the noise floor)
  --from T  --to T       part of the recording: seconds from its first sample, or RFC 3339
  --interval DT          seconds between grid steps (default: the recording's own)
  --center mean|none     what is taken off first (default: mean; none is the published recipe)
  --gap N                bridge gaps of up to N intervals (default: 3)
  --data DIR             data folder for stored:NAME (or FORESHIFT_DATA)
  --out MODEL.json       where the model is written
  --json                 print a summary as one JSON document

${ruleOptionsHelp}

example:
  foreshift fit run1.csv --channel "loop A" --window 3 --rank 5 --regime sides:-0.8,0.8 \\
    --least-lead 10 --horizon 20 --out loop-a.json
`;

const OPTIONS = {
  channel: { type: 'string', multiple: true },
  delays: { type: 'string' },
  window: { type: 'string' },
  rank: { type: 'string' },
  from: { type: 'string' },
  to: { type: 'string' },
  interval: { type: 'string' },
  center: { type: 'string' },
  gap: { type: 'string' },
  data: { type: 'string' },
  out: { type: 'string' },
  json: { type: 'boolean' },
  help: { type: 'boolean' },
  ...ruleOptions,
} as const;

/** What a fit is asked for, read from the options; times are still per recording. */
interface Training {
  recordings: Recording[];
  series: RecordedChannel[][];
  channels: { channel: string; unit: string }[];
  interval: number;
  gapIntervals: number;
  center: 'mean' | 'none';
}

/** `foreshift fit`; returns the exit code. */
export function fit(argv: string[]): Promise<number> {
  return runCommand('fit', async () => {
    const { values, positionals } = parseArgs({ args: argv, options: OPTIONS, allowPositionals: true });
    if (values.help) {
      process.stdout.write(HELP);
      return 0;
    }
    if (values.out === undefined) {
      throw new InputError(
        'NO_OUT',
        'there is no --out, expected where to write the model; add --out MODEL.json',
      );
    }
    const started = performance.now();
    const rule = readRuleOptions(values);
    const training = await readTraining(positionals, values);
    const model = fitTraining(training, values, values.out);
    if (rule !== null) addRule(model, training, rule);
    model.diagnostics.seconds = (performance.now() - started) / 1000;
    await writeModel(values.out, model);
    if (values.json) printJson(summarise(model));
    else process.stdout.write(describe(model, values.out));
    return 0;
  });
}

type Values = { [name: string]: string | boolean | (string | boolean)[] | undefined };

async function readTraining(names: string[], values: Values): Promise<Training> {
  if (names.length === 0) {
    throw new InputError(
      'NO_RECORDING',
      'no recording is named, expected at least one; write foreshift fit RECORDING.csv --channel NAME --out MODEL.json',
    );
  }
  const wanted = ((values.channel as string[] | undefined) ?? []).slice();
  if (wanted.length === 0) {
    throw new InputError('NO_CHANNEL', 'no channel is named, expected the one to fit; add --channel NAME');
  }
  const center = values.center ?? 'mean';
  if (center !== 'mean' && center !== 'none') {
    throw new InputError(
      'BAD_OPTION',
      `--center is "${String(center)}", expected mean or none; leave it out for mean`,
    );
  }
  const interval = numberOption(values, 'interval', 0);
  const recordings: Recording[] = [];
  for (const name of names) {
    const source = { data: textOption(values, 'data'), interval: interval ?? undefined };
    const recording = await readRecording(name, { ...source, channels: wantedChannels(wanted, values) });
    recordings.push(
      withoutLeftOut(cutRange(recording, textOption(values, 'from'), textOption(values, 'to'))),
    );
  }
  const series = recordings.map((recording) => wanted.map((name) => pickChannel(recording, name)));
  const channels = series[0]!.map(({ channel, unit }) => ({ channel, unit }));
  return {
    recordings,
    series,
    channels,
    interval: interval ?? usualInterval(series[0]![0]!.times),
    gapIntervals: numberOption(values, 'gap', 1) ?? 3,
    center,
  };
}

/** The channels to fit and the one that the rule for a switch reads. */
function wantedChannels(wanted: string[], values: Values): string[] {
  const regime = textOption(values, 'regime');
  const marks = regime === undefined ? null : marksChannel(readRegime(regime));
  return [...wanted, textOption(values, 'regime-channel') ?? marks].filter((name) => name != null);
}

const marksChannel = (regime: RegimeRule): string | null => (regime.kind === 'marks' ? regime.channel : null);

/** A recording with no values where marks and conditions leave them out. */
function withoutLeftOut(recording: Recording): Recording {
  const { channels, leftOut = [] } = recording;
  return {
    ...recording,
    channels: channels.map((one) => ({ ...one, values: leaveOut(one.times, one.values, leftOut) })),
  };
}

function textOption(values: Values, name: string): string | undefined {
  const value = values[name];
  return typeof value === 'string' ? value : undefined;
}

function fitTraining(training: Training, values: Values, out: string): Model {
  const { recordings, series, channels, interval, gapIntervals, center } = training;
  const window = numberOption(values, 'window', 0);
  const asked = wholeOption(values, 'delays', 0);
  if (window !== null && asked !== null) {
    throw new InputError(
      'BAD_OPTION',
      `--delays ${asked} and --window ${window} are both given, expected one of them; leave one out`,
    );
  }
  const delays = window === null ? asked : Math.round(window / interval);
  const runs = series.flatMap((one) => runsOf(one, interval, gapIntervals));
  const name = out.replace(/^.*[\\/]/, '').replace(/\.json$/, '');
  const model = fitModel(runs, interval, {
    name,
    channels,
    delays,
    rank: wholeOption(values, 'rank', 0),
    center,
    gapIntervals,
  });
  model.provenance = {
    recordings: recordings.map(({ name, sha256 }, i) => {
      const { times } = series[i]![0]!;
      return { name, sha256, from: times[0]!, to: times.at(-1)!, samples: times.length };
    }),
    program: programName(),
    fittedAt: new Date().toISOString(),
  };
  return model;
}

/**
 * Gives the model its rules. With a threshold they are taken as they are. Without one, it is chosen on all of the
 * recordings; the score is of the same procedure, window and rank included, done on their first half and judged on
 * the rest.
 */
function addRule(model: Model, training: Training, choice: RuleChoice): void {
  model.regime = choice.regime;
  model.regimeChannel = choice.regimeChannel;
  if (choice.threshold !== null) {
    model.rule = watchRuleOf(choice, choice.threshold);
    return;
  }
  const task = ruleTask(model, training, choice);
  model.rule = chooseRule(task, model);
  try {
    model.score = scoreOfChoice(task, model);
  } catch (error) {
    // too little to put half of it aside: the model keeps its rule and has no score
    if (!(error instanceof InputError)) throw error;
  }
}

/** What is to be warned of in the recordings of the fit, as a rehearsal takes it. */
function ruleTask(model: Model, training: Training, choice: RuleChoice): RehearsalTask {
  const { recordings, series, channels, interval, gapIntervals } = training;
  const extra = regimeChannelOf(model);
  return {
    request: {
      ...choice,
      recordings: recordings.map(({ name }) => name),
      channels: channels.map(({ channel }) => channel),
      regime: regimeRuleText(choice.regime),
      variable: 'forcing',
      ceiling: { falsePerHour: null, cameTrue: null },
      delay: 0,
      tunePart: 0.5,
      seed: 1,
      windows: null,
      ranks: null,
    },
    recordings: recordings.map((recording, i) => {
      const own = series[i]!;
      const there = extra === null || own.some(({ channel }) => channel === extra);
      const { name, sha256 } = recording;
      return { name, sha256, series: there ? own : [...own, pickChannel(recording, extra)], leftOut: [] };
    }),
    program: programName(),
    at: new Date().toISOString(),
    interval,
    gapIntervals,
  };
}

function regimeChannelOf({ regime, regimeChannel }: Model): string | null {
  return regime?.kind === 'marks' ? regime.channel : regimeChannel;
}

async function writeModel(path: string, model: Model): Promise<void> {
  try {
    await writeFile(path, modelToJson(model));
  } catch (error) {
    throw new InputError(
      'NOT_WRITTEN',
      `--out ${path} cannot be written (${(error as Error).message}), expected a path in a folder that exists; choose another`,
    );
  }
}

function describe(model: Model, out: string): string {
  const { diagnostics, rule, score } = model;
  const lines = [
    `${model.channels.map(({ channel }) => channel).join(', ')}: ${diagnostics.samples} samples every ${model.interval} s`,
    `window ${(model.delays * model.interval).toPrecision(4)} s (${model.delays} delays): ${diagnostics.windowChoice}`,
    `rank ${model.rank}: ${diagnostics.rankChoice}`,
    `singular vectors by ${diagnostics.method}; least R² of a row ${Math.min(...diagnostics.r2).toFixed(6)}`,
    `forcing: excess kurtosis ${diagnostics.forcing.kurtosis.toFixed(1)}, beyond 2 standard deviations ${(100 * diagnostics.forcing.share).toFixed(1)} % of the time`,
  ];
  if (rule === null)
    lines.push(
      'no watch rule: this model is drawn but never warns; fit again with --regime, --least-lead and --horizon',
    );
  else lines.push(`warns when the ${rule.variable} is above ${rule.threshold.toPrecision(3)}`);
  if (score !== null)
    lines.push(
      `judged on the second half: ${score.switches.warned} of ${score.switches.total} switches warned of, skill ${score.skill?.toFixed(2) ?? 'not known'}`,
    );
  return `${lines.join('\n')}\nwritten to ${out} in ${diagnostics.seconds.toFixed(2)} s\n`;
}
