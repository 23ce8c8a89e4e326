import { createHash } from 'node:crypto';
import { InputError } from '../signal/inputError.ts';
import { conditionStretches, type LeftOut } from '../signal/leaveOut.ts';
import type { StoredChannel, StoredRecording, StoreReader } from '../store/store.ts';
import { conditionWords } from '../watch/leftOutGate.ts';
import type { LeftOutStretch, RecordedChannel } from './recording.ts';

/** Where stored recordings are read from. */
export interface StoredSource {
  store: StoreReader;
  /** a recording is cut where nothing came for this long, seconds */
  gap: number;
  /** the store in words, for errors: its folder */
  where: string;
}

/** A stored recording's samples with what is to be left out of them; `hashOf` gives its SHA-256. */
export interface StoredSamples {
  name: string;
  channels: RecordedChannel[];
  leftOut: LeftOutStretch[];
}

/**
 * Reads `stored:CHANNEL`, all that a channel has stored (where times were recorded twice, what arrived last), or
 * `stored:CHANNEL/N`, its Nth recording, and over the same time the other wanted channels that are stored. What is
 * marked, or lies beyond a condition, on any of them is to be left out of all of them, as a live watch does.
 *
 * @throws InputError NO_RECORDING, saying what there is instead
 */
export async function readStored(
  name: string,
  source: StoredSource,
  wanted: readonly string[],
): Promise<StoredSamples> {
  const { store } = source;
  const [channel, part] = name.slice('stored:'.length).split('/');
  const known = await store.channels();
  const own = known.find((one) => one.channel === channel && one.samples > 0);
  if (own === undefined) throw noRecording(name, known, source.where);
  const channels = [recorded(own, await ownSamples(name, source, own.channel, part))];
  const { times } = channels[0]!;
  const [from, to] = [times[0]!, times[times.length - 1]!];
  for (const other of new Set(wanted)) {
    const found = known.find((one) => one.channel === other && one.samples > 0 && other !== own.channel);
    if (found !== undefined) channels.push(recorded(found, await store.samplesBetween(other, from, to)));
  }
  const names = channels.map((one) => one.channel);
  return { name, channels, leftOut: await leftOutOf(store, known, names, from, to) };
}

async function ownSamples(name: string, { store, gap }: StoredSource, channel: string, part?: string) {
  if (part === undefined)
    return store.samplesBetween(channel, Number.NEGATIVE_INFINITY, Number.POSITIVE_INFINITY);
  const all = (await store.recordings(gap)).filter((recording) => recording.channel === channel);
  const chosen = all.find((recording) => recording.name === `${channel}/${part}`);
  if (chosen !== undefined) return store.samplesFrom(channel, chosen.ordinal, chosen.samples);
  throw new InputError(
    'NO_RECORDING',
    `${name} is not stored; ${channel} has ${all.length} recordings, ${listed(all)}; name one of these`,
  );
}

const recorded = (
  { channel, unit }: StoredChannel,
  { times, values }: Pick<RecordedChannel, 'times' | 'values'>,
): RecordedChannel => ({ channel, unit, times, values });

/** SHA-256 of channels in order: of each the times, then the values, little-endian float64. */
export function hashOf(channels: readonly RecordedChannel[]): string {
  const hash = createHash('sha256');
  for (const { times, values } of channels) hash.update(bytesOf(times)).update(bytesOf(values));
  return hash.digest('hex');
}

function bytesOf({ buffer, byteOffset, byteLength }: Float64Array): Uint8Array {
  return new Uint8Array(buffer, byteOffset, byteLength);
}

/**
 * What marks and conditions leave out of these channels from `from` to `to` (seconds). A condition holds as its channel
 * was before `from`, if that is stored.
 */
async function leftOutOf(
  store: StoreReader,
  known: readonly StoredChannel[],
  channels: readonly string[],
  from: number,
  to: number,
): Promise<LeftOutStretch[]> {
  const stretches = (await store.marks())
    .filter(({ channel }) => channels.includes(channel))
    .map(({ from, to, why, text }) => ({
      from,
      to: to ?? Number.POSITIVE_INFINITY,
      why: why === 'other' && text !== '' ? text : why,
    }));
  for (const condition of await store.conditions()) {
    if (!channels.includes(condition.channel)) continue;
    const other = known.find((one) => one.channel === condition.when);
    const { times, values } = await upTo(store, other, from, to);
    const found = conditionStretches(times, values, condition, other?.newest ?? undefined);
    stretches.push(...found.map((one) => ({ ...one, why: conditionWords(condition) })));
  }
  return stretches.map((one) => within(one, from, to)).filter((one) => one.from <= one.to);
}

const within = <S extends LeftOut>(stretch: S, from: number, to: number): S => ({
  ...stretch,
  from: Math.max(stretch.from, from),
  to: Math.min(stretch.to, to),
});

/** How far before a recording a condition's last value is looked for first, seconds; then eight times as far, and so on. */
const LOOK_BACK = 60;

/** A channel's samples up to `to`, from one with a value at or before `from` on, if there is one. */
async function upTo(store: StoreReader, channel: StoredChannel | undefined, from: number, to: number) {
  if (channel === undefined) return { times: new Float64Array(), values: new Float64Array() };
  const first = channel.first ?? from;
  for (let back = LOOK_BACK; ; back *= 8) {
    const block = await store.samplesBetween(channel.channel, Math.max(first, from - back), to);
    const reaches = block.times.some((time, i) => time <= from && !Number.isNaN(block.values[i]!));
    if (reaches || from - back <= first) return block;
  }
}

function listed(recordings: StoredRecording[]): string {
  const shown = recordings.slice(-5).map(({ name, from, to }) => `stored:${name} (${from} to ${to} s)`);
  return (recordings.length > shown.length ? 'the newest: ' : '') + shown.join(', ');
}

function noRecording(name: string, channels: StoredChannel[], where: string): InputError {
  const names = channels.filter(({ samples }) => samples > 0).map(({ channel }) => `stored:${channel}`);
  return new InputError(
    'NO_RECORDING',
    `${name} is not in ${where}; ` +
      (names.length > 0
        ? `it has ${names.join(', ')}; name one of these`
        : 'nothing is stored there yet; connect a producer to a server first, or name a file'),
  );
}
