import { existsSync } from 'node:fs';
import { mkdir, readFile } from 'node:fs/promises';
import { dirname, join, resolve } from 'node:path';
import { parseArgs } from 'node:util';
import { InputError } from '../signal/inputError.ts';
import { type BackupFacts, writeBackup } from '../store/backup.ts';
import { asStoreError } from '../store/storeError.ts';
import { printJson, runCommand } from './options.ts';
import { programName } from './program.ts';

const HELP = `foreshift backup --to FILE [options]

Copies all that is recorded, models, watches, warnings and the logbook into one file, as they are at one moment; a
server may go on recording meanwhile. The file is there once it was checked and is on disk. Its settings.json goes with
it; the folder "demo" does not.

  --to FILE    where to; a file that is there is not written over
  --data DIR   what is copied (default: ./foreshift-data, or FORESHIFT_DATA)
  --json       one JSON document: file, bytes, version, madeAt, program, channels, samples, warnings, seconds

example: foreshift backup --data ./foreshift-data --to backups/monday.db
`;

const OPTIONS = {
  to: { type: 'string' },
  data: { type: 'string' },
  json: { type: 'boolean' },
  help: { type: 'boolean', short: 'h' },
} as const;

/** Facts of a backup in words. */
export const factsText = ({ channels, samples, warnings, bytes }: BackupFacts): string =>
  `${samples} samples of ${channels} ${channels === 1 ? 'channel' : 'channels'}, ` +
  `${warnings} ${warnings === 1 ? 'warning' : 'warnings'}, ${(bytes / 1e6).toFixed(1)} MB`;

/** The folder as given, or by FORESHIFT_DATA, or the usual one. */
export const dataFolder = (given: string | undefined): string =>
  given ?? process.env.FORESHIFT_DATA ?? './foreshift-data';

/** A fault of the store as bad input where the person named the wrong thing, else as a failure. */
export function asCommandError(fault: unknown): Error {
  const error = asStoreError(fault);
  return ['NO_STORE', 'NEWER', 'NOT_A_BACKUP', 'IN_USE'].includes(error.code)
    ? new InputError(error.code, error.message)
    : error;
}

async function run(argv: string[]): Promise<number> {
  const { values } = parseArgs({ args: argv, options: OPTIONS });
  if (values.help) {
    process.stdout.write(HELP);
    return 0;
  }
  if (values.to === undefined)
    throw new InputError(
      'NO_TARGET',
      'nowhere to copy to is named; write for example --to backups/monday.db',
    );
  const file = resolve(values.to);
  if (existsSync(file))
    throw new InputError(
      'FILE_EXISTS',
      `${values.to} is there already and a backup writes over nothing; name another file, or remove it`,
    );
  const data = dataFolder(values.data);
  const began = performance.now();
  await mkdir(dirname(file), { recursive: true });
  const facts = backUp(data, file, await readFile(join(data, 'settings.json'), 'utf8').catch(() => null));
  const seconds = (performance.now() - began) / 1000;
  if (values.json) printJson({ ...facts, seconds });
  else process.stdout.write(`${values.to}: ${factsText(facts)}, checked, in ${seconds.toFixed(1)} s\n`);
  return 0;
}

function backUp(data: string, file: string, settings: string | null): BackupFacts {
  try {
    return writeBackup(data, file, { madeAt: Date.now() / 1000, program: programName(), settings });
  } catch (fault) {
    throw asCommandError(fault);
  }
}

/** `foreshift backup`: all of a data folder in one file. */
export function backup(argv: string[]): Promise<number> {
  return runCommand('backup', () => run(argv));
}
