import { existsSync } from 'node:fs';
import { fileURLToPath } from 'node:url';
import { Worker } from 'node:worker_threads';
import { packFrames } from './framePacking.ts';
import type { StoreOptions } from './openStore.ts';
import type { FrameToStore, Store, WatchProgress } from './store.ts';
import { StoreError } from './storeError.ts';
import type { StoreMethod, StoreReply, StoreRequest, WorkerStart } from './storeMessages.ts';

interface Pending {
  resolve(result: unknown): void;
  reject(fault: StoreError): void;
}

/**
 * Opens the store of a data folder in a thread of its own, so that waiting for the disk delays nothing else. Should the
 * thread end by itself, every pending and later call is rejected (FAILED).
 *
 * @throws StoreError as `openStore`
 */
export function createStoreThread(dataFolder: string, options: StoreOptions): Promise<Store> {
  const workerData: WorkerStart = { dataFolder, options };
  const worker = new Worker(workerFile(), { workerData });
  return new Promise((resolve, reject) => {
    const calls = createCalls(worker);
    worker.on('message', (reply: StoreReply) => {
      if (reply.kind === 'open') resolve(remoteStore(calls.call, reply.notices));
      else if (reply.kind === 'refused') reject(new StoreError(reply.code, reply.message));
      else calls.answered(reply);
    });
    const ended = (why: string) => {
      const error = new StoreError(
        'FAILED',
        `the thread of the store ended (${why}); nothing more is recorded, restart the server`,
      );
      reject(error);
      calls.end(error);
    };
    worker.on('error', (fault) => ended(fault instanceof Error ? fault.message : String(fault)));
    worker.on('exit', (code) => ended(`exit code ${code}`));
  });
}

function workerFile(): URL {
  // Node runs no TypeScript: under a test runner the built worker serves
  const url = new URL(
    import.meta.url.endsWith('.ts') ? '../../dist/server/store/storeWorker.js' : './storeWorker.js',
    import.meta.url,
  );
  if (!existsSync(fileURLToPath(url)))
    throw new StoreError(
      'FAILED',
      `the store's worker ${fileURLToPath(url)} is missing; build it with "npm run build:server"`,
    );
  return url;
}

type Call = (method: StoreMethod, args: unknown[], owned?: ArrayBuffer[]) => Promise<unknown>;

function createCalls(worker: Worker) {
  const pending = new Map<number, Pending>();
  let nextId = 0;
  let failures = 0;
  let over: StoreError | null = null;
  const call: Call = (method, args, owned = []) =>
    new Promise((resolve, reject) => {
      if (over !== null) {
        reject(over);
        return;
      }
      const request: StoreRequest = { id: nextId++, method, args, failures };
      pending.set(request.id, { resolve, reject });
      if (method === 'close')
        over = new StoreError('CLOSED', 'the store is closed; open it again before using it');
      worker.postMessage(request, owned);
    });
  return {
    call,
    answered: (reply: StoreReply & { kind: 'result' | 'fault' }) => {
      const waiting = pending.get(reply.id);
      pending.delete(reply.id);
      if (reply.kind === 'result') {
        waiting?.resolve(reply.result);
        return;
      }
      failures = Math.max(failures, reply.failures);
      waiting?.reject(new StoreError(reply.code, reply.message));
    },
    end: (error: StoreError) => {
      over ??= error;
      for (const { reject } of pending.values()) reject(error);
      pending.clear();
    },
  };
}

function remoteStore(call: Call, notices: readonly string[]): Store {
  const methods: Record<Exclude<StoreMethod, 'appendFrames' | 'saveProgress'>, true> = {
    saveChannel: true,
    channels: true,
    countFault: true,
    run: true,
    skipFrame: true,
    samplesFrom: true,
    samplesBetween: true,
    signalColumns: true,
    traceColumns: true,
    recordings: true,
    saveModel: true,
    model: true,
    models: true,
    saveWatch: true,
    watches: true,
    saveWarning: true,
    warnings: true,
    saveSwitch: true,
    switches: true,
    log: true,
    logEntries: true,
    logbook: true,
    saveMark: true,
    removeMark: true,
    marks: true,
    saveCondition: true,
    removeCondition: true,
    conditions: true,
    saveRehearsal: true,
    removeRehearsal: true,
    rehearsals: true,
    rehearsalResult: true,
    prune: true,
    saveDelivery: true,
    deliveries: true,
    pendingDeliveries: true,
    saveDelay: true,
    delay: true,
    close: true,
  };
  const remote = Object.fromEntries(
    Object.keys(methods).map((method) => [method, (...args: unknown[]) => call(method as StoreMethod, args)]),
  );
  const appendFrames = (frames: FrameToStore[]) => {
    const packed = packFrames(frames);
    return call('appendFrames', [packed], [packed.numbers.buffer as ArrayBuffer]);
  };
  const saveProgress = (progress: WatchProgress[]) => call('saveProgress', [progress.map(compact)]);
  return { ...remote, appendFrames, saveProgress, notices } as unknown as Store;
}

/** A view sent to a thread would take all the memory under it along. */
function compact({ watch, snapshot, trace }: WatchProgress): WatchProgress {
  return {
    watch,
    snapshot: Uint8Array.from(snapshot),
    trace: trace === null ? null : { times: trace.times.slice(), values: trace.values.slice() },
  };
}
