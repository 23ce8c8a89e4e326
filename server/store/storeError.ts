/** Stable codes of what can go wrong with the store. */
export type StoreErrorCode =
  | 'FULL'
  | 'DAMAGED'
  | 'CLOSED'
  | 'FAILED'
  | 'NEWER'
  | 'IN_USE'
  | 'NO_STORE'
  | 'NOT_A_BACKUP';

/** A fault of the store: a stable `code` and a sentence with what was wrong, expected, and to be done. */
export class StoreError extends Error {
  readonly code: StoreErrorCode;
  constructor(code: StoreErrorCode, message: string) {
    super(message);
    this.name = 'StoreError';
    this.code = code;
  }
}

/** SHMSIZE: not even the index of the log finds room. */
const FULL_CODES = new Set(['SQLITE_FULL', 'SQLITE_IOERR_WRITE', 'SQLITE_IOERR_SHMSIZE', 'ENOSPC']);

/** Any fault as a StoreError: SQLite's result codes become the store's own, with the remedy. */
export function asStoreError(fault: unknown): StoreError {
  if (fault instanceof StoreError) return fault;
  const code = String((fault as { code?: unknown } | null)?.code ?? '');
  const text = fault instanceof Error ? fault.message : String(fault);
  if (FULL_CODES.has(code))
    return new StoreError(
      'FULL',
      `the store cannot write, its disk is full (${text}); make room on the disk`,
    );
  if (isDamage(fault))
    return new StoreError(
      'DAMAGED',
      `the store's database is damaged (${text}); restart the server: it sets the database aside and begins a new one`,
    );
  return new StoreError('FAILED', `the store could not do this (${text}); what it held before is unchanged`);
}

/** Whether a fault says that the database file itself cannot be read as one. */
export function isDamage(fault: unknown): boolean {
  const code = String((fault as { code?: unknown } | null)?.code ?? '');
  return code.startsWith('SQLITE_CORRUPT') || code === 'SQLITE_NOTADB';
}
