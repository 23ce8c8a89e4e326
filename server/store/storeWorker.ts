import { parentPort, workerData } from 'node:worker_threads';
import { type PackedFrames, unpackFrames } from './framePacking.ts';
import { openStore } from './openStore.ts';
import type { Store } from './store.ts';
import { asStoreError, type StoreError } from './storeError.ts';
import { ownedBuffers, type StoreReply, type StoreRequest, type WorkerStart } from './storeMessages.ts';

const CHANGES = new Set(['appendFrames', 'skipFrame', 'saveProgress', 'countFault']);

const port = parentPort!;
const say = (reply: StoreReply, owned: ArrayBuffer[] = []) => port.postMessage(reply, owned);

function serve(store: Store & { failures(): number }): void {
  let lastFailure: StoreError | null = null;
  const answer = async ({ method, args, failures }: StoreRequest): Promise<unknown> => {
    // sent before the caller could hear of a rollback: to store it would leave a hole before it
    if (lastFailure !== null && failures < store.failures() && CHANGES.has(method)) throw lastFailure;
    if (method === 'appendFrames') return store.appendFrames(unpackFrames(args[0] as PackedFrames));
    return (store[method] as (...args: unknown[]) => Promise<unknown>)(...args);
  };
  port.on('message', (request: StoreRequest) => {
    answer(request).then(
      (result) => {
        say({ kind: 'result', id: request.id, result }, ownedBuffers(result));
        if (request.method === 'close') port.close();
      },
      (fault: unknown) => {
        const error = asStoreError(fault);
        if (store.failures() > 0 && error.code !== 'CLOSED') lastFailure = error;
        const { code, message } = error;
        say({ kind: 'fault', id: request.id, code, message, failures: store.failures() });
      },
    );
  });
  say({ kind: 'open', notices: store.notices });
}

try {
  const { dataFolder, options } = workerData as WorkerStart;
  serve(openStore(dataFolder, options));
} catch (fault) {
  const { code, message } = asStoreError(fault);
  say({ kind: 'refused', code, message });
}
