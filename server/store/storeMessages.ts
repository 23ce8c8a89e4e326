import type { StoreOptions } from './openStore.ts';
import type { Store } from './store.ts';
import type { StoreErrorCode } from './storeError.ts';

/** The calls that cross to the store's thread. */
export type StoreMethod = Exclude<keyof Store, 'notices'>;

/** What the store's thread is started with. */
export interface WorkerStart {
  dataFolder: string;
  options: StoreOptions;
}

/** One call. `failures`: how many rollbacks the caller had heard of when it made the call. */
export interface StoreRequest {
  id: number;
  method: StoreMethod;
  args: unknown[];
  failures: number;
}

/** What the store's thread says: first that it is open or why not, then one answer a call. */
export type StoreReply =
  | { kind: 'open'; notices: readonly string[] }
  | { kind: 'refused'; code: StoreErrorCode; message: string }
  | { kind: 'result'; id: number; result: unknown }
  | { kind: 'fault'; id: number; code: StoreErrorCode; message: string; failures: number };

/** The memory of the typed arrays in an answer, which may be handed over instead of copied. */
export function ownedBuffers(result: unknown): ArrayBuffer[] {
  if (typeof result !== 'object' || result === null) return [];
  return Object.values(result)
    .filter((value) => value instanceof Float64Array)
    .map((value) => value.buffer as ArrayBuffer);
}
