import { readFile, stat } from 'node:fs/promises';
import { join } from 'node:path';
import { Settings } from '../../shared-types/settings.ts';
import { InputError } from '../signal/inputError.ts';
import { openStoreReader } from '../store/openStore.ts';
import { readCsv } from './csv.ts';
import { hashOf, readStored } from './readStored.ts';
import type { Recording } from './recording.ts';

/** Where recordings are read from. */
export interface RecordingSource {
  /** data folder for `stored:` names; left out: FORESHIFT_DATA or ./foreshift-data */
  data?: string | undefined;
  /** seconds between rows of a file without a time column */
  interval?: number | undefined;
  /** other channels wanted beside a stored one, over the same time; those that are not stored are not in the recording */
  channels?: readonly string[] | undefined;
}

const LARGEST_FILE = 2 ** 31 - 1;

/**
 * Reads a recording: a CSV file's path, `stored:CHANNEL` for all that a channel has stored (where times were recorded
 * twice, what arrived last), or `stored:CHANNEL/N` for its Nth recording. The store may be in use by a server meanwhile.
 *
 * @throws InputError NO_FILE, NOT_A_FILE, TOO_LARGE, NO_RECORDING or CSV_…, each saying what there is instead;
 *         StoreError NO_STORE, NEWER or DAMAGED
 */
export async function readRecording(nameOrPath: string, source: RecordingSource = {}): Promise<Recording> {
  if (!nameOrPath.startsWith('stored:')) return readFileRecording(nameOrPath, source);
  const folder = source.data ?? process.env.FORESHIFT_DATA ?? 'foreshift-data';
  const gap = await recordingGap(folder);
  const store = openStoreReader(folder);
  try {
    const samples = await readStored(nameOrPath, { store, gap, where: folder }, source.channels ?? []);
    return { ...samples, sha256: hashOf(samples.channels) };
  } finally {
    await store.close();
  }
}

async function readFileRecording(path: string, { interval }: RecordingSource): Promise<Recording> {
  const found = await stat(path).catch(() => null);
  if (found === null)
    throw new InputError(
      'NO_FILE',
      `there is no file ${path}; expected a CSV file or stored:CHANNEL; check the path`,
    );
  if (found.isDirectory())
    throw new InputError('NOT_A_FILE', `${path} is a folder; expected a CSV file; name a file in it`);
  if (found.size > LARGEST_FILE)
    throw new InputError(
      'TOO_LARGE',
      `${path} has ${found.size} bytes; expected at most ${LARGEST_FILE}; split it at a gap and name the parts`,
    );
  return readCsv(await readFile(path), path, { interval });
}

async function recordingGap(folder: string): Promise<number> {
  const text = await readFile(join(folder, 'settings.json'), 'utf8').catch(() => '{}');
  try {
    return Settings.parse(JSON.parse(text)).recordingGap;
  } catch {
    throw new InputError(
      'BAD_SETTINGS',
      `${join(folder, 'settings.json')} cannot be read as settings; expected JSON such as {"recordingGap": 60}; correct it`,
    );
  }
}
