import { randomUUID } from 'node:crypto';
import { setTimeout as sleep } from 'node:timers/promises';
import { parseArgs } from 'node:util';
import { pickChannel } from '../recordings/pickChannel.ts';
import { readRecording } from '../recordings/readRecording.ts';
import type { RecordedChannel, Recording } from '../recordings/recording.ts';
import { usualInterval } from '../signal/grid.ts';
import { InputError } from '../signal/inputError.ts';
import { numberOption, printJson, runCommand } from './options.ts';
import { createProducer, type Producer, type ProducerState } from './producer.ts';

const HELP = `foreshift play RECORDING --to ws://HOST:PORT/ingest [options]

Sends a recording as a live stream; ends once everything is acknowledged.

  --to ADDRESS      where to send, as foreshift watch prints it
  --channel NAME    a channel of the recording; may be given again (default: all)
  --as NAME         name of the channel there (default: "NAME, played"); for one channel only
  --pace 1|N|max    as fast as it was recorded, N times that, or as fast as it goes (default: 1)
  --times now|recorded   stamp the samples from now on, or as recorded (default: now). At another pace than 1 now
                    means elapsed time: the samples keep the interval they were recorded at, which models depend on
  --data DIR        data folder of a stored:NAME recording
  --json            one JSON document about what was sent

RECORDING is a CSV file or stored:NAME. A server that asks for a token is shown the one in FORESHIFT_TOKEN; a
certificate of your own is trusted by NODE_EXTRA_CA_CERTS=FILE.

example: foreshift play loop.csv --channel dT --pace 10 --to ws://127.0.0.1:4717/ingest
`;

/** A frame holds what a tenth of a second of playing brings, at most so many samples. */
const FRAME_SECONDS = 0.1;
const MOST_IN_FRAME = 1000;

const OPTIONS = {
  to: { type: 'string' },
  channel: { type: 'string', multiple: true },
  as: { type: 'string' },
  pace: { type: 'string' },
  times: { type: 'string' },
  data: { type: 'string' },
  json: { type: 'boolean' },
  help: { type: 'boolean', short: 'h' },
} as const;

function paceOf(values: { pace?: string | undefined }): number {
  if (values.pace === 'max') return Number.POSITIVE_INFINITY;
  const pace = numberOption(values, 'pace') ?? 1;
  if (pace > 0) return pace;
  throw new InputError(
    'BAD_OPTION',
    `--pace is ${pace}, expected a number above 0 or max; write for example --pace 10`,
  );
}

function addressOf(to: string | undefined): string {
  if (to === undefined)
    throw new InputError(
      'NO_ADDRESS',
      'there is no --to; add --to ws://127.0.0.1:4717/ingest, as foreshift watch prints it',
    );
  let address: URL;
  try {
    address = new URL(to);
  } catch {
    throw new InputError('BAD_ADDRESS', `--to is "${to}", expected ws://HOST:PORT/ingest; write it in full`);
  }
  if (address.protocol !== 'ws:' && address.protocol !== 'wss:')
    throw new InputError('BAD_ADDRESS', `--to is "${to}", expected an address that begins with ws://`);
  if (address.pathname === '/') address.pathname = '/ingest';
  return address.href;
}

function chosen(recording: Recording, names: string[] | undefined): RecordedChannel[] {
  const channels = names ? names.map((name) => pickChannel(recording, name)) : recording.channels;
  const empty = channels.find(({ times }) => times.length === 0);
  if (!empty) return channels;
  throw new InputError(
    'NO_SAMPLES',
    `"${empty.channel}" of ${recording.name} holds no sample; play another channel`,
  );
}

/** A channel on its way: `place` is the next sample to send. */
interface Track {
  source: RecordedChannel;
  as: string;
  place: number;
}

/** Seconds between samples; 0 for a single one. */
const stepOf = ({ times }: RecordedChannel): number => (times.length > 1 ? usualInterval(times) : 0);

function sendUntil(track: Track, until: number, shift: number, producer: Producer): number {
  const { times, values } = track.source;
  let end = track.place;
  while (end < times.length && end - track.place < MOST_IN_FRAME && times[end]! <= until) end++;
  if (end === track.place) return 0;
  const t = times.slice(track.place, end);
  if (shift !== 0) for (let i = 0; i < t.length; i++) t[i] = t[i]! + shift;
  producer.send(track.as, { t, values: values.slice(track.place, end) });
  const sent = end - track.place;
  track.place = end;
  return sent;
}

const times0 = (track: Track): number => track.source.times[0]!;

async function sendAll(
  tracks: Track[],
  pace: number,
  now: boolean,
  producer: Producer,
  progress: (sent: number) => void,
) {
  const first = Math.min(...tracks.map(times0));
  const started = performance.now() / 1000;
  // present times at the pace of the clock; faster, and times that keep their spacing would run ahead of it
  const shift = now ? (pace === 1 ? Date.now() / 1000 : 0) - first : 0;
  let sent = 0;
  while (tracks.some(({ place, source }) => place < source.times.length)) {
    const elapsed = performance.now() / 1000 - started;
    const until = Number.isFinite(pace)
      ? first + elapsed * pace
      : nextTime(tracks) + MOST_IN_FRAME * longestStep(tracks);
    let sentNow = 0;
    for (const track of tracks) {
      let count = 0;
      do {
        await producer.room();
        sentNow += count = sendUntil(track, until, shift, producer);
      } while (count === MOST_IN_FRAME && Number.isFinite(pace));
    }
    sent += sentNow;
    progress(sent);
    if (Number.isFinite(pace)) await sleep(FRAME_SECONDS * 1000);
  }
  return sent;
}

const nextTime = (tracks: Track[]): number =>
  Math.min(
    ...tracks.filter(({ place, source }) => place < source.times.length).map((t) => t.source.times[t.place]!),
  );
const longestStep = (tracks: Track[]): number =>
  Math.max(...tracks.map(({ source }) => stepOf(source)), 1e-9);

function progressLine(total: number, quiet: boolean) {
  let last = 0;
  return (sent: number, ending = false) => {
    if (quiet || (!ending && Date.now() - last < 500)) return;
    last = Date.now();
    process.stderr.write(`\r${sent} of ${total} samples sent${ending ? '\n' : ''}`);
  };
}

async function run(argv: string[]): Promise<number> {
  const { values, positionals } = parseArgs({ args: argv, options: OPTIONS, allowPositionals: true });
  if (values.help) {
    process.stdout.write(HELP);
    return 0;
  }
  if (process.channel) {
    // played for a server: without it there is nobody to play to
    process.once('disconnect', () => process.exit(1));
    process.channel.unref();
  }
  if (positionals.length !== 1)
    throw new InputError(
      'ONE_RECORDING',
      `${positionals.length} recordings are named, expected one; name a CSV file or stored:NAME`,
    );
  const to = addressOf(values.to);
  const pace = paceOf(values);
  const times = values.times ?? 'now';
  if (times !== 'now' && times !== 'recorded')
    throw new InputError(
      'BAD_OPTION',
      `--times is "${times}", expected now or recorded; write --times recorded`,
    );
  const recording = await readRecording(positionals[0]!, { data: values.data });
  const sources = chosen(recording, values.channel);
  if (values.as !== undefined && sources.length !== 1)
    throw new InputError(
      'ONE_CHANNEL',
      `--as renames one channel, ${sources.length} are played; add --channel NAME`,
    );
  const tracks = sources.map((source) => ({
    source,
    as: values.as ?? `${source.channel}, played`,
    place: 0,
  }));
  return stream(recording.name, tracks, { to, pace, now: times === 'now', json: values.json === true });
}

async function stream(
  name: string,
  tracks: Track[],
  how: { to: string; pace: number; now: boolean; json: boolean },
): Promise<number> {
  const total = tracks.reduce((sum, { source }) => sum + source.times.length, 0);
  const progress = progressLine(total, how.json);
  let refused = 0;
  const onState = (state: ProducerState) => {
    if (state.kind === 'lost')
      process.stderr.write(`\nforeshift play: no connection to ${how.to} (${state.reason}); trying again\n`);
    if (state.kind === 'refused') {
      // what could not be stored is sent again
      if (state.code !== 'NOT_STORED') refused++;
      process.stderr.write(`\nforeshift play: ${state.error}\n`);
    }
  };
  const producer = createProducer({
    to: how.to,
    run: randomUUID(),
    channels: tracks.map(({ source, as }) => ({
      channel: as,
      unit: source.unit,
      label: `${source.channel} of ${name}`.slice(0, 200),
      interval: stepOf(source) || null,
    })),
    onState,
  });
  try {
    const sent = await sendAll(tracks, how.pace, how.now, producer, progress);
    await producer.idle();
    progress(sent, true);
    if (how.json)
      printJson({
        recording: name,
        to: how.to,
        channels: tracks.map(({ as }) => as),
        samples: sent,
        refused,
      });
    return refused > 0 ? 1 : 0;
  } finally {
    await producer.close();
  }
}

/** `foreshift play`: a recording as a live stream, resumable; 0 once everything is acknowledged. */
export function play(argv: string[]): Promise<number> {
  return runCommand('play', () => run(argv));
}
