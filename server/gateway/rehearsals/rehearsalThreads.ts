import { existsSync } from 'node:fs';
import { fileURLToPath } from 'node:url';
import { Worker } from 'node:worker_threads';
import type { StoredSamples } from '../../recordings/readStored.ts';
import { InputError } from '../../signal/inputError.ts';
import {
  type Answers,
  type HelperOrder,
  type HelperReply,
  type Question,
  type SearchOrder,
  type SearchReply,
  samplesOf,
} from './rehearsalMessages.ts';

type Ending = Exclude<SearchReply, { kind: 'progress' }>;

/** A search in a thread of its own. */
export interface SearchThread {
  /** what was found, or why nothing was */
  ended: Promise<Ending | { kind: 'stopped' }>;
  stop(): void;
}

/** Starts a search; the samples in the order are handed over and empty afterwards. */
export function startSearch(
  order: SearchOrder,
  progress: (done: number, doing: string) => void,
): SearchThread {
  const worker = new Worker(workerFile(), { workerData: 'search' });
  let stopped = false;
  const ended = new Promise<Ending | { kind: 'stopped' }>((resolve) => {
    const failed = (why: string) =>
      resolve(
        stopped ? { kind: 'stopped' } : { kind: 'failed', fault: `the search ended by itself (${why})` },
      );
    worker.on('message', (reply: SearchReply) => {
      if (reply.kind === 'progress') progress(reply.done, reply.doing);
      else resolve(reply);
    });
    worker.on('error', (error) => failed((error as Error).message));
    worker.on('exit', (code) => failed(`exit code ${code}`));
  });
  void ended.then(() => worker.terminate());
  worker.postMessage(order, order.recordings.flatMap(samplesOf));
  return {
    ended,
    stop() {
      stopped = true;
      void worker.terminate();
    },
  };
}

/** A thread that answers questions about recordings and keeps the last few of them. */
export interface HelperThread {
  /**
   * @param key  names the recording as it is now; it is read only when the thread does not have it
   * @throws InputError where the question makes no sense
   */
  ask<K extends keyof Answers>(
    key: string,
    read: () => Promise<StoredSamples>,
    question: Extract<Question, { kind: K }>,
  ): Promise<Answers[K]>;
  close(): Promise<void>;
}

/** The thread is ended when nothing was asked for so long, and with it what it keeps. */
const IDLE_MILLISECONDS = 60_000;
/** A recording that grows is read again after so long. */
const FRESH_MILLISECONDS = 30_000;

/** A helper whose thread is started when it is needed. */
export function createHelper(): HelperThread {
  interface Pending {
    resolve(answer: unknown): void;
    reject(error: Error): void;
  }
  let worker: Worker | null = null;
  let idle: NodeJS.Timeout | undefined;
  let nextId = 1;
  const pending = new Map<number, Pending>();
  const loaded = new Map<string, number>();

  const end = async (why: string) => {
    const ending = worker;
    worker = null;
    loaded.clear();
    clearTimeout(idle);
    for (const { reject } of pending.values()) reject(new Error(why));
    pending.clear();
    await ending?.terminate();
  };
  const begin = (): Worker => {
    const started = new Worker(workerFile(), { workerData: 'questions' });
    started.on('message', (reply: HelperReply) => {
      const waiting = pending.get(reply.id);
      pending.delete(reply.id);
      if (reply.kind === 'answer') waiting?.resolve(reply.answer);
      else waiting?.reject(new InputError(reply.code, reply.message));
    });
    const ended = (why: string) => {
      if (worker === started) void end(`the thread that answers ended (${why}); ask again`);
    };
    started.on('error', (error) => ended((error as Error).message));
    started.on('exit', (code) => ended(`exit code ${code}`));
    return started;
  };
  const stayAwake = () => {
    clearTimeout(idle);
    idle = setTimeout(() => {
      if (pending.size === 0) void end('idle');
      else stayAwake();
    }, IDLE_MILLISECONDS);
    idle.unref();
  };

  return {
    async ask(key, read, question) {
      const fresh = performance.now() - (loaded.get(key) ?? Number.NEGATIVE_INFINITY) < FRESH_MILLISECONDS;
      const recording = fresh ? null : await read();
      worker ??= begin();
      stayAwake();
      if (recording !== null) {
        loaded.delete(key);
        loaded.set(key, performance.now());
        // as many as the thread keeps
        while (loaded.size > 2) loaded.delete(loaded.keys().next().value!);
      }
      const order: HelperOrder = { id: nextId++, key, recording, question };
      const answered = new Promise<unknown>((resolve, reject) => pending.set(order.id, { resolve, reject }));
      worker.postMessage(order, recording === null ? [] : samplesOf(recording));
      return answered as Promise<Answers[(typeof question)['kind']]>;
    },
    close: () => end('the server is stopping'),
  };
}

function workerFile(): URL {
  // Node runs no TypeScript: under a test runner the built worker serves
  const url = new URL(
    import.meta.url.endsWith('.ts')
      ? '../../../dist/server/gateway/rehearsals/rehearsalWorker.js'
      : './rehearsalWorker.js',
    import.meta.url,
  );
  if (existsSync(fileURLToPath(url))) return url;
  throw new Error(
    `the worker ${fileURLToPath(url)} is missing, expected it beside the built server; build it with "npm run build:server"`,
  );
}
