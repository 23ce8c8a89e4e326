import { join } from 'node:path';
import Database from 'better-sqlite3';
import { StoreError } from './storeError.ts';

/**
 * Claims a data folder for one writing process and returns the function that gives it back. The claim is SQLite's
 * own exclusive lock on an empty file beside the database: the operating system drops it with the process, so a
 * killed server leaves nothing to clear away. Readers are not kept out.
 *
 * @throws StoreError IN_USE while another process (or this one) holds the claim
 */
export function claimFolder(dataFolder: string): () => void {
  const lock = new Database(join(dataFolder, 'foreshift.lock'), { timeout: 0 });
  try {
    lock.pragma('journal_mode = MEMORY');
    lock.exec('BEGIN EXCLUSIVE');
  } catch (fault) {
    lock.close();
    if (!String((fault as { code?: unknown }).code).startsWith('SQLITE_BUSY')) throw fault;
    throw new StoreError(
      'IN_USE',
      `the data folder ${dataFolder} is in use by another Foreshift server; ` +
        'two may not write to one folder: stop the other, or give this one its own with --data DIR',
    );
  }
  return () => {
    lock.close();
  };
}
