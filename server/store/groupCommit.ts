import type { Database } from 'better-sqlite3';
import { asStoreError, StoreError } from './storeError.ts';

/** What stands in memory between commits. */
export interface Unwritten {
  /** writes all of it */
  flush(): void;
  /** drops all of it: the database alone is right */
  forget(): void;
  /** the database was found damaged */
  damaged(): void;
}

/** Collects calls into transactions. */
export interface GroupCommit {
  /** applies a change now; resolves with its result once the transaction that holds it is on disk */
  write<T>(change: () => T): Promise<T>;
  /** reads now, seeing every change applied before */
  read<T>(question: () => T): Promise<T>;
  /** commits what there is, then refuses everything; the database stays open */
  close(): Promise<void>;
  /** how often a transaction was rolled back */
  failures(): number;
}

interface Waiting {
  resolve(): void;
  reject(fault: StoreError): void;
}

const closed = () => new StoreError('CLOSED', 'the store is closed; open it again before using it');

/**
 * One commit at most every `commitEvery` seconds. A change that the store itself refuses (StoreError) harms no other.
 * A fault of the database rolls the whole transaction back: all that wait for it are rejected, and so are changes
 * made before the callers could hear of it, so that nothing is stored behind a hole.
 */
export function createGroupCommit(
  database: Database,
  commitEvery: number,
  unwritten: Unwritten,
): GroupCommit {
  let waiting: Waiting[] = [];
  let timer: NodeJS.Timeout | null = null;
  let isClosed = false;
  let failed: StoreError | null = null;
  let failures = 0;
  const begin = database.prepare('BEGIN IMMEDIATE');
  const end = database.prepare('COMMIT');

  const understood = (fault: unknown): StoreError => {
    const error = asStoreError(fault);
    if (error.code === 'DAMAGED') unwritten.damaged();
    return error;
  };

  const fail = (fault: unknown): StoreError => {
    const error = understood(fault);
    unwritten.forget();
    if (database.inTransaction) database.exec('ROLLBACK');
    if (timer !== null) clearTimeout(timer);
    timer = null;
    failures++;
    failed = error;
    queueMicrotask(() => {
      failed = null;
    });
    const rejected = waiting;
    waiting = [];
    for (const one of rejected) one.reject(error);
    return error;
  };

  const commit = (): void => {
    timer = null;
    if (!database.inTransaction) return;
    try {
      unwritten.flush();
      end.run();
    } catch (fault) {
      fail(fault);
      return;
    }
    const done = waiting;
    waiting = [];
    for (const one of done) one.resolve();
  };

  const apply = <T>(change: () => T): T => {
    if (isClosed) throw closed();
    if (failed !== null) throw failed;
    try {
      if (!database.inTransaction) begin.run();
      return change();
    } catch (fault) {
      throw fault instanceof StoreError ? fault : fail(fault);
    } finally {
      if (database.inTransaction) timer ??= setTimeout(commit, commitEvery * 1000);
    }
  };

  return {
    write: <T>(change: () => T) =>
      new Promise<T>((resolve, reject) => {
        const result = apply(change);
        waiting.push({ resolve: () => resolve(result), reject });
      }),
    read: async <T>(question: () => T) => {
      if (isClosed) throw closed();
      try {
        if (database.inTransaction) unwritten.flush();
      } catch (fault) {
        throw fail(fault);
      }
      try {
        return question();
      } catch (fault) {
        throw understood(fault);
      }
    },
    close: async () => {
      if (timer !== null) clearTimeout(timer);
      commit();
      isClosed = true;
    },
    failures: () => failures,
  };
}
