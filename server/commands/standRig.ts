/**
 * The demo's producer: a process of its own that speaks the public ingest protocol, as a reader's own rig would.
 *
 *     node dist/server/commands/standRig.js --to ws://127.0.0.1:4717/ingest [--seed NAME] [--past SECONDS] [--lock FILE]
 */
import { randomUUID } from 'node:crypto';
import { readFileSync, rmSync, statSync, utimesSync, writeFileSync } from 'node:fs';
import { pathToFileURL } from 'node:url';
import { parseArgs } from 'node:util';
import type { ChannelDescription } from '../../shared-types/channel.ts';
import { createRandom } from '../rigs/random.ts';
import { createStand } from '../rigs/stand.ts';
import { numberOption, runCommand } from './options.ts';
import { createProducer, type FrameToSend } from './producer.ts';
import { FIRST_READING, PLAYED_INTERVAL, roomHumidity } from './roomReadings.ts';

/** Seconds of recent past sent first, so that the strips are not empty. */
const PAST_SECONDS = 180;
/** Samples of the past in a frame. */
const PAST_FRAME = 50;
/** Seconds between frames: about one sample in each, two in some, none in others. */
const TICK_SECONDS = 0.25;
/** A rig that has found no server for so long ends itself. */
const GIVE_UP_SECONDS = 600;
/** A lock file older than this belongs to a rig that is gone. */
const LOCK_SECONDS = 15;

const ROOM = {
  channel: 'room-humidity',
  unit: '% RH',
  label:
    'Room humidity: real readings of 9 May 2010, one every 5 s, played 10 times faster (mote 1, Suthaharan et al. 2010)',
  interval: PLAYED_INTERVAL,
  low: 0,
  high: 100,
} satisfies ChannelDescription;

/** Samples of a channel that became due. */
interface Due {
  channel: string;
  times: Float64Array;
  values: Float64Array;
}

/**
 * What the demo measures: the two loops of the stand and the room's humidity.
 *
 * @param startedAt Unix seconds of the stand's time 0
 */
export function createDemoSource(seed: string, startedAt: number, humidity = roomHumidity()) {
  const stand = createStand(seed);
  let played = 0;
  const room = (until: number): Due[] => {
    const from = played;
    played = Math.max(from, Math.floor(until / PLAYED_INTERVAL) + 1);
    const values = Float64Array.from(
      { length: played - from },
      (_, i) => humidity[(FIRST_READING + from + i) % humidity.length]!,
    );
    const times = values.map((_, i) => startedAt + (from + i) * PLAYED_INTERVAL);
    return values.length === 0 ? [] : [{ channel: ROOM.channel, times, values }];
  };
  return {
    channels: [...stand.channels, ROOM],
    /** everything up to `now` (Unix seconds) that was not given before */
    due(now: number): Due[] {
      const loops = stand.advance(now - startedAt).map(({ channel, times, values }) => ({
        channel,
        times: times.map((time) => startedAt + time),
        values,
      }));
      return [...loops, ...room(now - startedAt)];
    },
  };
}

/** Cuts what is due into frames of at most `most` samples. */
export function* framesOfDue(due: readonly Due[], most: number): Generator<[string, FrameToSend]> {
  for (const { channel, times, values } of due) {
    for (let from = 0; from < times.length; from += most) {
      yield [channel, { t: times.slice(from, from + most), values: values.slice(from, from + most) }];
    }
  }
}

/**
 * Sends both loops and the room's humidity to a server in real time until it is stopped or has found no server for ten
 * minutes.
 *
 * @returns the exit code
 */
export async function standRig(argv: string[]): Promise<number> {
  const { values } = parseArgs({
    args: argv,
    options: {
      to: { type: 'string', default: 'ws://127.0.0.1:4717/ingest' },
      seed: { type: 'string' },
      past: { type: 'string' },
      lock: { type: 'string' },
    },
  });
  if (values.lock !== undefined && !takeLock(values.lock, values.to)) {
    process.stderr.write(`the demo's rig already feeds ${values.to}; nothing to do\n`);
    return 0;
  }
  const run = randomUUID();
  const past = numberOption(values, 'past', 0) ?? PAST_SECONDS;
  await feed(values.to, values.seed ?? run, run, past, values.lock);
  if (values.lock !== undefined) rmSync(values.lock, { force: true });
  return 0;
}

function feed(to: string, seed: string, run: string, past: number, lock: string | undefined): Promise<void> {
  // what passes is measured monotonically, so that a step of the clock makes no step in the times
  const started = Date.now() / 1000;
  const monotonic = performance.now();
  const now = () => started + (performance.now() - monotonic) / 1000;
  const source = createDemoSource(seed, started - past);
  const ticks = createRandom(run);
  let heardAt = now();
  let connected = false;
  const producer = createProducer({
    to,
    run,
    channels: source.channels,
    onState: (state) => {
      if (state.kind === 'connected') connected = true;
      if (state.kind === 'lost') {
        if (connected) heardAt = now();
        connected = false;
      }
      if (state.kind === 'refused')
        process.stderr.write(`the server would not use a frame: ${state.error}\n`);
    },
  });
  for (const [channel, frame] of framesOfDue(source.due(now()), PAST_FRAME)) producer.send(channel, frame);
  return new Promise((resolve) => {
    let timer: NodeJS.Timeout;
    const stop = () => {
      clearTimeout(timer);
      producer.close().then(resolve, resolve);
    };
    const tick = () => {
      for (const [channel, frame] of framesOfDue(source.due(now()), PAST_FRAME))
        producer.send(channel, frame);
      if (lock !== undefined) refreshLock(lock);
      if (!connected && now() - heardAt > GIVE_UP_SECONDS) stop();
      else timer = setTimeout(tick, 1000 * TICK_SECONDS * (0.6 + 0.8 * ticks.uniform()));
    };
    process.once('SIGTERM', stop);
    process.once('SIGINT', stop);
    tick();
  });
}

/** Whether this process is now the only rig that feeds the address: a killed server's rig may still be running. */
function takeLock(file: string, to: string): boolean {
  const mine = JSON.stringify({ to, process: process.pid });
  try {
    const age = Date.now() / 1000 - statSync(file).mtimeMs / 1000;
    const held = JSON.parse(readFileSync(file, 'utf8')) as { to: string };
    if (age < LOCK_SECONDS && held.to === to) return false;
  } catch {
    // no file, or none that can be read: nobody holds it
  }
  writeFileSync(file, mine);
  return true;
}

function refreshLock(file: string): void {
  try {
    utimesSync(file, new Date(), new Date());
  } catch {
    // the data folder was removed; the lock matters to nobody then
  }
}

if (process.argv[1] !== undefined && import.meta.url === pathToFileURL(process.argv[1]).href) {
  process.exitCode = await runCommand('demo rig', () => standRig(process.argv.slice(2)));
}
