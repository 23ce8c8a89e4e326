import { closeSync, fsyncSync, mkdirSync, openSync, renameSync, rmSync, writeSync } from 'node:fs';
import { dirname } from 'node:path';
import { InputError } from '../../signal/inputError.ts';

const OWNER_ALONE = 0o600;

/**
 * Writes a file that only its owner can read, whole or not at all.
 *
 * @throws InputError BUSY when another process is writing it
 */
export function writePrivately(file: string, text: string): void {
  const fresh = `${file}.new`;
  mkdirSync(dirname(file), { recursive: true });
  let handle: number;
  try {
    // made, never opened: what somebody else put there is not written into
    handle = openSync(fresh, 'wx', OWNER_ALONE);
  } catch (error) {
    if ((error as NodeJS.ErrnoException).code !== 'EEXIST') throw error;
    throw new InputError(
      'BUSY',
      `${file} is being written by another process; wait, or remove ${fresh} if there is none`,
    );
  }
  try {
    writeSync(handle, text);
    fsyncSync(handle);
    closeSync(handle);
    renameSync(fresh, file);
  } catch (error) {
    rmSync(fresh, { force: true });
    throw error;
  }
}
