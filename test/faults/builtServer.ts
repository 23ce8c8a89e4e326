import { type ChildProcess, spawn } from 'node:child_process';
import { once } from 'node:events';
import { existsSync } from 'node:fs';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { Decoder } from 'cbor-x';
import { WebSocket } from 'ws';
import { FEED_PROTOCOL, type FeedMessage } from '../../shared-types/feed.ts';

const program = fileURLToPath(new URL('../../dist/server/commands/main.js', import.meta.url));

/** The built program as a process that can be killed at any moment and started again on the same folder and port. */
export interface BuiltServer {
  port: number;
  /** all it wrote to standard error, of every start */
  complaints(): string;
  /** begins a start and does not wait for it */
  spawn(): void;
  /** starts it and waits until it serves */
  start(): Promise<void>;
  /** its exit code, null when it was killed */
  stop(signal: 'SIGKILL' | 'SIGTERM'): Promise<number | null>;
}

/** The built program over FOLDER/data, to be started; `options` are added to its command. */
export function builtServer(folder: string, options: readonly string[]): BuiltServer {
  if (!existsSync(program)) throw new Error(`${program} is missing; npm run build makes it`);
  let child: ChildProcess | null = null;
  let complaints = '';
  const begin = (): ChildProcess => {
    const where = ['--port', String(server.port), '--data', join(folder, 'data')];
    child = spawn(process.execPath, [program, 'watch', '--no-browser', ...where, ...options], {
      stdio: ['ignore', 'pipe', 'pipe'],
    });
    child.stderr!.on('data', (data) => (complaints += String(data)));
    return child;
  };
  const server: BuiltServer = {
    port: 0,
    complaints: () => complaints,
    spawn: () => void begin().stdout!.resume(),
    start: () =>
      new Promise((resolve, reject) => {
        let said = '';
        begin().stdout!.on('data', (data) => {
          said += String(data);
          const found = /127\.0\.0\.1:(\d+)\/ingest/.exec(said);
          if (!found) return;
          server.port = Number(found[1]);
          resolve();
        });
        child!.once('close', () => reject(new Error(`the server ended before it served: ${complaints}`)));
      }),
    stop: async (signal) => {
      if (child === null || child.exitCode !== null || child.signalCode !== null) return null;
      const ended = once(child, 'close');
      child.kill(signal);
      return (await ended)[0] as number | null;
    },
  };
  return server;
}

const decoder = new Decoder({ mapsAsObjects: true, useRecords: false });

/** A page without a browser: connects to the feed, again and again when it is lost, and hands on what it hears. */
export function createListener(port: () => number, hear: (message: FeedMessage) => void): () => void {
  let socket: WebSocket;
  let timer: NodeJS.Timeout;
  let stopped = false;
  const connect = () => {
    socket = new WebSocket(`ws://127.0.0.1:${port()}/feed`, FEED_PROTOCOL);
    socket.on('message', (data: Buffer) => hear(decoder.decode(data) as FeedMessage));
    socket.on('error', () => {});
    socket.on('close', () => {
      if (!stopped) timer = setTimeout(connect, 50);
    });
  };
  connect();
  return () => {
    stopped = true;
    clearTimeout(timer);
    socket.terminate();
  };
}
