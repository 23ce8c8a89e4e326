/**
 * The demo's producer: a process of its own that speaks the public ingest protocol, as a reader's own rig would.
 *
 *     node dist/server/commands/standRig.js --to ws://127.0.0.1:4717/ingest [--seed NAME] [--past SECONDS] [--after TIME] [--lock FILE]
 */
import { randomUUID } from 'node:crypto';
import { readFileSync, rmSync, statSync, utimesSync, writeFileSync } from 'node:fs';
import { setTimeout as sleep } from 'node:timers/promises';
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
const GIVE_UP_SECONDS = 300;
/** A lock file older than this belongs to a rig that is gone. */
const LOCK_SECONDS = 15;
/** Seconds between looks at another rig's lock. */
const LOOK_SECONDS = 2;

const ROOM = {
  channel: 'Room humidity',
  unit: '% RH',
  label:
    'real readings of 9 May 2010, one every 5 s, played 10 times faster (mote 1, Suthaharan et al. 2010)',
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

/** What is due, less the samples up to `after` (Unix seconds). */
export function newerThan(due: readonly Due[], after: number): Due[] {
  return due.map(({ channel, times, values }) => {
    const first = times.findIndex((time) => time > after);
    const from = first === -1 ? times.length : first;
    return { channel, times: times.subarray(from), values: values.subarray(from) };
  });
}

/**
 * Sends both loops and the room's humidity to a server in real time until it is stopped or has found no server for
 * five minutes.
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
      after: { type: 'string' },
      lock: { type: 'string' },
    },
  });
  const stopped = untilStopped();
  if (values.lock !== undefined && !(await waitForLock(values.lock, values.to, stopped))) return 0;
  const run = randomUUID();
  const past = numberOption(values, 'past', 0) ?? PAST_SECONDS;
  const after = numberOption(values, 'after', 0) ?? 0;
  await feed({ to: values.to, seed: values.seed ?? run, run, past, after, lock: values.lock, stopped });
  if (values.lock !== undefined) rmSync(values.lock, { force: true });
  return 0;
}

/** What a rig is told; `stopped` resolves when it is to end. */
interface Feeding {
  to: string;
  seed: string;
  run: string;
  past: number;
  /** the server has samples up to here (Unix seconds): the past that is sent begins later */
  after: number;
  lock: string | undefined;
  stopped: Promise<void>;
}

function untilStopped(): Promise<void> {
  return new Promise((resolve) => {
    process.once('SIGTERM', resolve);
    process.once('SIGINT', resolve);
  });
}

function feed({ to, seed, run, past, after, lock, stopped }: Feeding): Promise<void> {
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
  for (const [channel, frame] of framesOfDue(newerThan(source.due(now()), after), PAST_FRAME)) {
    producer.send(channel, frame);
  }
  return new Promise((resolve) => {
    let timer: NodeJS.Timeout;
    let over = false;
    const stop = () => {
      over = true;
      clearTimeout(timer);
      producer.close().then(resolve, resolve);
    };
    const tick = () => {
      if (over) return;
      for (const [channel, frame] of framesOfDue(source.due(now()), PAST_FRAME))
        producer.send(channel, frame);
      if (lock !== undefined) refreshLock(lock);
      if (!connected && now() - heardAt > GIVE_UP_SECONDS) stop();
      else timer = setTimeout(tick, 1000 * TICK_SECONDS * (0.6 + 0.8 * ticks.uniform()));
    };
    stopped.then(stop);
    tick();
  });
}

/**
 * Waits until no other rig feeds the address: that of a server that was killed may have gone on, and the restarted
 * server finds it connected again. While it lives this process only stands in for it: told to stop, it stops it; left
 * alone by a server that was killed in its turn, it just ends.
 *
 * @returns false when this process is to end
 */
async function waitForLock(file: string, to: string, stopped: Promise<void>): Promise<boolean> {
  let end: 'told' | 'left' | null = null;
  const left = () => {
    end = 'left';
  };
  stopped.then(() => {
    end = 'told';
  });
  process.once('disconnect', left);
  let holder = holderOf(file, to);
  while (holder !== null && end === null) {
    await Promise.race([stopped, sleep(1000 * LOOK_SECONDS)]);
    const now = holderOf(file, to);
    if (end === 'told' && now === holder) stopProcess(holder);
    holder = now;
  }
  process.off('disconnect', left);
  if (end !== null) return false;
  writeFileSync(file, JSON.stringify({ to, process: process.pid }));
  return true;
}

function stopProcess(id: number): void {
  try {
    process.kill(id, 'SIGTERM');
  } catch {
    // it has ended meanwhile
  }
}

/** The process of the rig that feeds the address now, null when there is none. */
function holderOf(file: string, to: string): number | null {
  try {
    const age = Date.now() / 1000 - statSync(file).mtimeMs / 1000;
    const held = JSON.parse(readFileSync(file, 'utf8')) as { to: string; process: number };
    return age < LOCK_SECONDS && held.to === to && Number.isInteger(held.process) ? held.process : null;
  } catch {
    // no file, or none that can be read: nobody holds it
    return null;
  }
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
