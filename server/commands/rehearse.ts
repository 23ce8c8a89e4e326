import { readFile, writeFile } from 'node:fs/promises';
import { parseArgs } from 'node:util';
import type { Model } from '../../shared-types/model.ts';
import type { RehearsalResult } from '../../shared-types/rehearsal.ts';
import { modelFromJson } from '../model/modelFile.ts';
import { readRecording } from '../recordings/readRecording.ts';
import type { Recording } from '../recordings/recording.ts';
import { leftOutSeries } from '../rehearsal/leftOut.ts';
import { channelsRead } from '../rehearsal/prepare.ts';
import { runRehearsal } from '../rehearsal/rehearsal.ts';
import { rehearse as rehearseWatch } from '../rehearsal/rehearse.ts';
import { reportHtml } from '../rehearsal/report.ts';
import { InputError } from '../signal/inputError.ts';
import { createRandom } from '../signal/random.ts';
import { type OptionValues, printJson, ruleOptions, ruleOptionsHelp, runCommand } from './options.ts';
import { programName } from './program.ts';
import { describeRehearsal, jsonOfRehearsal } from './rehearsalText.ts';
import { givenRequest, searchRequest } from './rehearseRequest.ts';

const HELP = `foreshift rehearse RECORDING... --channel NAME --regime RULE --least-lead S --horizon S [options]
foreshift rehearse RECORDING... --model MODEL.json [options]

Says how well you would have been warned. Without a model, settings (window, rank, variable, threshold, re-arm,
hold-off) are chosen on the first part of the recordings and judged on the rest, beside plain baselines; with one, its
own settings are judged. RECORDING is a CSV file or stored:NAME.

  --channel NAME         channel to watch (with a model: the model's); again for a model of several
  --model MODEL.json     the watch to rehearse; rule options replace its own
  --variable NAME        forcing, level or best (default: best)
  --false-per-hour B     as many false warnings an hour are acceptable
  --come-true F          at least this share of the warnings must come true, 0 to 1
  --delay S              seconds until a warning reaches who acts on it; taken off the leads (default: 0)
  --tune-part F          share that is not judged, of the time, or of four or more recordings (default: 0.5)
  --seed N               of the chance behind p-value and intervals (default: 1)
  --data DIR             data folder for stored:NAME (or FORESHIFT_DATA)
  --out MODEL.json       write the chosen settings as a model that can be watched with
  --report FILE.html     write a report for people: one file, prints on A4
  --json                 print one JSON document

${ruleOptionsHelp.replace('chosen on the recording', "chosen, or the model's own")}

example:
  foreshift rehearse run1.csv --channel "loop A" --regime sides:-0.8,0.8 --least-lead 10 --horizon 20 \\
    --false-per-hour 1 --out loop-a.json
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

/** `foreshift rehearse`: the search for settings, or the judging of a given watch; returns the exit code. */
export function rehearse(argv: string[]): Promise<number> {
  return runCommand('rehearse', async () => {
    const { values, positionals } = parseArgs({ args: argv, options: OPTIONS, allowPositionals: true });
    if (values.help) {
      process.stdout.write(HELP);
      return 0;
    }
    const given = values.model === undefined ? null : await readModel(values.model);
    const { request, model } =
      given === null ? searchRequest(positionals, values) : givenRequest(given, positionals, values);
    const recordings = await readRecordings(positionals, values.data, channelsRead(request));
    const started = performance.now();
    const result = runRehearsal(
      {
        request,
        model,
        program: programName(),
        at: new Date().toISOString(),
        recordings: recordings.map(taskRecording),
      },
      progressLine(),
    );
    result.seconds = (performance.now() - started) / 1000;
    await write(result, values);
    report(result, recordings, values.json === true);
    return 0;
  });
}

const taskRecording = ({ name, sha256, channels, leftOut = [] }: Recording) => ({
  name,
  sha256,
  series: channels,
  leftOut,
});

/** Lists what the live watch says with the chosen settings: its score is that of the result. */
function report(result: RehearsalResult, recordings: readonly Recording[], json: boolean): void {
  const { request } = result;
  const model = modelFromJson(result.model);
  const rehearsal = rehearseWatch(
    {
      model,
      channels: request.channels,
      rule: model.rule,
      regime: model.regime,
      regimeChannel: model.regimeChannel,
    },
    recordings.map((one) => leftOutSeries(taskRecording(one))),
    {
      tunePart: request.tunePart,
      delay: request.delay,
      uniform: createRandom(request.seed).uniform,
    },
  );
  if (json) printJson(jsonOfRehearsal(result, model, rehearsal));
  else process.stdout.write(describeRehearsal(result, model, rehearsal));
}

/** One line on a terminal's standard error that says how far the work has come; elsewhere nothing. */
function progressLine(): (done: number, doing: string) => void {
  if (!process.stderr.isTTY) return () => {};
  return (done, doing) => {
    const text = done < 1 ? `${(100 * done).toFixed(0).padStart(3)} %  ${doing}` : '';
    process.stderr.write(`\r\x1b[2K${text}`);
  };
}

async function write(result: RehearsalResult, { out, report }: OptionValues): Promise<void> {
  if (out !== undefined) await writeText('out', String(out), result.model);
  if (report !== undefined) await writeText('report', String(report), reportHtml(result));
}

async function writeText(option: string, path: string, text: string): Promise<void> {
  try {
    await writeFile(path, text);
    process.stderr.write(`${path} is written\n`);
  } catch (error) {
    throw new InputError(
      'NOT_WRITTEN',
      `--${option} ${path} cannot be written (${(error as Error).message}), expected a path in a folder that exists; choose another`,
    );
  }
}

async function readModel(file: string): Promise<Model> {
  const text = await readFile(file, 'utf8').catch((error: NodeJS.ErrnoException) => {
    throw new InputError(
      'NO_MODEL',
      `the model file ${file} cannot be read (${error.code}), expected one that foreshift fit wrote; check the path`,
    );
  });
  return modelFromJson(text);
}

async function readRecordings(
  names: string[],
  data: string | undefined,
  channels: string[],
): Promise<Recording[]> {
  if (names.length === 0) {
    throw new InputError(
      'NO_RECORDING',
      'no recording is named, expected at least one; write foreshift rehearse RECORDING.csv --channel NAME …',
    );
  }
  const recordings: Recording[] = [];
  for (const name of names) recordings.push(await readRecording(name, { data, channels }));
  return recordings;
}
