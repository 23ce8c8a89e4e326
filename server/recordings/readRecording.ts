import { createHash } from 'node:crypto';
import { readFile, stat } from 'node:fs/promises';
import { join } from 'node:path';
import { Settings } from '../../shared-types/settings.ts';
import { InputError } from '../signal/inputError.ts';
import { openStoreReader } from '../store/openStore.ts';
import type { StoredChannel, StoredRecording, StoreReader } from '../store/store.ts';
import { readCsv } from './csv.ts';
import type { RecordedChannel, Recording } from './recording.ts';

/** Where recordings are read from. */
export interface RecordingSource {
  /** data folder for `stored:` names; left out: FORESHIFT_DATA or ./foreshift-data */
  data?: string | undefined;
  /** seconds between rows of a file without a time column */
  interval?: number | undefined;
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
    return await readStored(store, nameOrPath, gap, folder);
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

async function readStored(store: StoreReader, name: string, gap: number, folder: string): Promise<Recording> {
  const [channel, part] = name.slice('stored:'.length).split('/');
  const channels = await store.channels();
  const description = channels.find((known) => known.channel === channel && known.samples > 0);
  if (description === undefined) throw noRecording(name, channels, folder);
  if (part === undefined)
    return stored(name, description, await store.samplesBetween(channel!, -Infinity, Infinity));
  const all = (await store.recordings(gap)).filter((recording) => recording.channel === channel);
  const chosen = all.find((recording) => recording.name === `${channel}/${part}`);
  if (chosen === undefined)
    throw new InputError(
      'NO_RECORDING',
      `${name} is not stored; ${channel} has ${all.length} recordings, ${listed(all)}; name one of these`,
    );
  return stored(name, description, await store.samplesFrom(channel!, chosen.ordinal, chosen.samples));
}

function listed(recordings: StoredRecording[]): string {
  const shown = recordings.slice(-5).map(({ name, from, to }) => `stored:${name} (${from} to ${to} s)`);
  return (recordings.length > shown.length ? 'the newest: ' : '') + shown.join(', ');
}

function noRecording(name: string, channels: StoredChannel[], folder: string): InputError {
  const names = channels.filter(({ samples }) => samples > 0).map(({ channel }) => `stored:${channel}`);
  return new InputError(
    'NO_RECORDING',
    `${name} is not in ${folder}; ` +
      (names.length > 0
        ? `it has ${names.join(', ')}; name one of these`
        : 'nothing is stored there yet; connect a producer to a server first, or name a file'),
  );
}

function stored(
  name: string,
  { channel, unit }: StoredChannel,
  samples: Pick<RecordedChannel, 'times' | 'values'>,
): Recording {
  const { times, values } = samples;
  const hash = createHash('sha256').update(bytesOf(times)).update(bytesOf(values));
  return { name, channels: [{ channel, unit, times, values }], sha256: hash.digest('hex') };
}

function bytesOf({ buffer, byteOffset, byteLength }: Float64Array): Uint8Array {
  return new Uint8Array(buffer, byteOffset, byteLength);
}
