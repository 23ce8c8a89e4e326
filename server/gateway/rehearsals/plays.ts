import { type ChildProcess, spawn } from 'node:child_process';
import type { PlayState } from '../../../shared-types/rehearsal.ts';
import type { Channels } from '../channels/channels.ts';
import type { Journal } from '../journal.ts';
import { Refused } from '../refused.ts';

/** The program that plays recordings, up to its `play` command, and the data folder it reads them from. */
export interface Player {
  program: string[];
  data: string;
}

/** What is to be played, and how: see `foreshift play`. */
export interface NewPlay {
  /** `stored:CHANNEL` or `stored:CHANNEL/N` */
  recording: string;
  /** a number of times as fast as it was recorded, or `max` */
  pace: string;
  /** name of the channel; left out: "NAME, played", with a number where that one goes on beyond now */
  as?: string | undefined;
}

/** Recordings on their way into this server's own ingest, each by a process of its own. */
export interface Plays {
  start(play: NewPlay): PlayState;
  /** newest first */
  states(): PlayState[];
  stop(id: string): PlayState;
  /** ends what runs; resolves once it has ended */
  close(): Promise<void>;
}

export interface PlaysNeeds {
  player: Player | null;
  journal: Journal;
  channels: Channels;
  /** address of this server's ingest */
  ingest(): string;
  /** the token that ingest asks for; null: none */
  token: string | null;
}

const MOST_RUNNING = 4;
const KEPT = 20;
/** Seconds by which a channel may be ahead of the clock and still be continued. */
const SLACK = 1;
/** Times from here on are Unix time, below it elapsed time. */
const UNIX_FROM = 1e8;
/** Of what a process complained of, so much is kept. */
const COMPLAINT_LENGTH = 2000;

interface Entry {
  state: PlayState;
  child: ChildProcess;
  ended: Promise<void>;
}

export function createPlays({ player, journal, channels, ingest, token }: PlaysNeeds): Plays {
  const entries = new Map<string, Entry>();
  let nextId = 1;

  const running = () => [...entries.values()].filter(({ state }) => state.state === 'running');
  /** At the pace of the clock a channel goes on with present times; at another one with elapsed time, on a new channel. */
  const takes = (name: string, pace: string): boolean => {
    const newest = channels.newest(name);
    return newest === null || (pace === '1' && newest >= UNIX_FROM && newest < Date.now() / 1000 + SLACK);
  };
  const freeName = (channel: string, pace: string): string => {
    for (let n = 1; ; n++) {
      const name = n === 1 ? `${channel.slice(0, 68)}, played` : `${channel.slice(0, 68)}, played ${n}`;
      const taken = running().some(({ state }) => state.as.includes(name));
      if (!taken && takes(name, pace)) return name;
    }
  };
  const log = ({ recording, as }: PlayState, text: string) =>
    journal.log({ kind: 'play', channel: as[0]!, watch: null, by: null, text: `${recording}: ${text}` });

  const check = ({ recording, as }: NewPlay): string => {
    const channel = /^stored:([^/]+)(\/\d+)?$/.exec(recording)?.[1];
    if (player === null)
      throw new Refused(501, 'NO_PLAYER', 'this server cannot play recordings; use foreshift play beside it');
    if (channel === undefined || !channels.has(channel))
      throw new Refused(
        404,
        'NO_RECORDING',
        `there is no recording "${recording.slice(0, 100)}"; GET /api/recordings lists them, as stored:CHANNEL/N`,
      );
    if (running().length >= MOST_RUNNING)
      throw new Refused(429, 'TOO_MANY', `${MOST_RUNNING} recordings are being played; stop one, or wait`);
    if (as !== undefined && running().some(({ state }) => state.as.includes(as)))
      throw new Refused(
        409,
        'CHANNEL_IN_USE',
        `a recording is being played to "${as}"; stop it, or name another`,
      );
    return channel;
  };

  const follow = (state: PlayState, child: ChildProcess): Promise<void> => {
    let complaint = '';
    child.stderr!.on('data', (data: Buffer) => {
      complaint = (complaint + String(data)).slice(-COMPLAINT_LENGTH);
    });
    return new Promise((resolve) => {
      const end = (code: number | null, why: string) => {
        resolve();
        if (state.state !== 'running') return;
        state.state = code === 0 ? 'done' : 'failed';
        state.fault = code === 0 ? null : why;
        log(state, code === 0 ? `played to the end as "${state.as[0]}"` : `could not be played: ${why}`);
      };
      child.once('error', (error) => end(null, error.message));
      child.once('close', (code, signal) =>
        end(code, lastLine(complaint) ?? `it ended with ${code ?? signal}`),
      );
    });
  };

  return {
    start(play) {
      const channel = check(play);
      const { program, data } = player!;
      const as = play.as ?? freeName(channel, play.pace);
      const id = String(nextId++);
      const { recording, pace } = play;
      const state: PlayState = { id, recording, as: [as], pace, state: 'running', fault: null };
      const options = [
        'play',
        recording,
        '--data',
        data,
        '--to',
        ingest(),
        '--pace',
        pace,
        '--as',
        as,
        '--json',
      ];
      const child = spawn(program[0]!, [...program.slice(1), ...options], {
        // by the channel it notices when this server is no more
        stdio: ['ignore', 'ignore', 'pipe', 'ipc'],
        // never in the arguments: those are for all to see
        env: { ...process.env, ...(token === null ? {} : { FORESHIFT_TOKEN: token }) },
      });
      entries.set(id, { state, child, ended: follow(state, child) });
      log(state, `played as "${as}", pace ${pace}`);
      for (const [old, entry] of entries)
        if (entries.size > KEPT && entry.state.state !== 'running') entries.delete(old);
      return { ...state };
    },
    states: () => [...entries.values()].map(({ state }) => ({ ...state })).reverse(),
    stop(id) {
      const entry = entries.get(id);
      if (entry === undefined)
        throw new Refused(
          404,
          'NOT_THERE',
          `there is no play "${id.slice(0, 60)}"; GET /api/plays lists them`,
        );
      if (entry.state.state === 'running') {
        entry.state.state = 'stopped';
        entry.child.kill('SIGTERM');
        log(entry.state, 'stopped');
      }
      return { ...entry.state };
    },
    async close() {
      for (const { state, child } of running()) {
        state.state = 'stopped';
        child.kill('SIGTERM');
      }
      await Promise.all([...entries.values()].map(({ ended }) => ended));
    },
  };
}

/** The last line of what was written on standard error, without the program's name; null: nothing. */
function lastLine(text: string): string | null {
  const lines = text.split(/[\r\n]+/).filter((line) => line.trim() !== '');
  return lines.at(-1)?.replace(/^foreshift play: /, '') ?? null;
}
