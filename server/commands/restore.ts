import { existsSync } from 'node:fs';
import { mkdir, readdir, writeFile } from 'node:fs/promises';
import { join } from 'node:path';
import { parseArgs } from 'node:util';
import { InputError } from '../signal/inputError.ts';
import { isInUse, readBackup } from '../store/backup.ts';
import { asCommandError, dataFolder, factsText } from './backup.ts';
import { printJson, runCommand } from './options.ts';

const HELP = `foreshift restore FILE [options]

Puts a backup into a data folder that is empty or not there yet. A folder that holds something, or that a server runs
on, is left as it is.

  --data DIR   where to (default: ./foreshift-data, or FORESHIFT_DATA)
  --json       one JSON document: data, file, bytes, version, madeAt, program, channels, samples, warnings

example: foreshift restore backups/monday.db --data ./foreshift-data
`;

const OPTIONS = {
  data: { type: 'string' },
  json: { type: 'boolean' },
  help: { type: 'boolean', short: 'h' },
} as const;

async function refuseUsed(data: string): Promise<void> {
  if (!existsSync(data)) return;
  const inUse = (() => {
    try {
      return isInUse(data);
    } catch (fault) {
      throw asCommandError(fault);
    }
  })();
  if (inUse)
    throw new InputError(
      'IN_USE',
      `a Foreshift server runs on ${data}; stop it and name an empty folder with --data DIR`,
    );
  const held = await readdir(data);
  if (held.length === 0) return;
  throw new InputError(
    'NOT_EMPTY',
    `${data} is not empty (it holds ${held.slice(0, 3).join(', ')}) and a restore writes over nothing; ` +
      'name another folder with --data DIR, or move this one away',
  );
}

async function run(argv: string[]): Promise<number> {
  const { values, positionals } = parseArgs({ args: argv, options: OPTIONS, allowPositionals: true });
  if (values.help) {
    process.stdout.write(HELP);
    return 0;
  }
  const [file] = positionals;
  if (file === undefined || positionals.length > 1)
    throw new InputError(
      'ONE_FILE',
      `${positionals.length} files are named, expected one; write for example foreshift restore backups/monday.db`,
    );
  if (!existsSync(file))
    throw new InputError('NO_BACKUP', `there is no file ${file}; name one that foreshift backup made`);
  const data = dataFolder(values.data);
  await refuseUsed(data);
  await mkdir(data, { recursive: true });
  const { facts, settings } = restored(file, data);
  if (settings !== null) await writeFile(join(data, 'settings.json'), settings, { flush: true });
  if (values.json) printJson({ data, ...facts });
  else
    process.stdout.write(
      `${data}: ${factsText(facts)}, as of ${new Date(facts.madeAt * 1000).toISOString()}\n`,
    );
  return 0;
}

function restored(file: string, data: string): ReturnType<typeof readBackup> {
  try {
    return readBackup(file, data);
  } catch (fault) {
    throw asCommandError(fault);
  }
}

/** `foreshift restore`: a backup into an empty data folder. */
export function restore(argv: string[]): Promise<number> {
  return runCommand('restore', () => run(argv));
}
