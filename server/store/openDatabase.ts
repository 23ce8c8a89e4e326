import { existsSync, mkdirSync, renameSync, rmSync, statSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import Database from 'better-sqlite3';
import { makePruneTables } from './pruneTables.ts';
import { migrate, SCHEMA_VERSION, schemaVersion } from './schema.ts';
import { isDamage, StoreError } from './storeError.ts';

/** Name of the database in the data folder. */
export const DATABASE_FILE = 'foreshift.db';

/** Up to this size a database is read through when it is opened, so that damage anywhere shows at once. */
const READ_THROUGH_BYTES = 32 * 1024 * 1024;
/** No database has a version beyond this: the number is spoilt. */
const HIGHEST_VERSION = 10_000;
/** The write-ahead log is cut back to this size once what it held is in the database. */
const LARGEST_LOG_BYTES = 16 * 1024 * 1024;

/**
 * Opens the folder's database for writing; makes folder and database where there are none. A damaged one is set
 * aside under a name with the time, a new one begun, and a sentence pushed to `notices`.
 *
 * @throws StoreError NEWER where the database was written by a newer program
 */
export function openDatabase(dataFolder: string, notices: string[]): Database.Database {
  mkdirSync(dataFolder, { recursive: true });
  const file = join(dataFolder, DATABASE_FILE);
  try {
    return open(file);
  } catch (fault) {
    if (!isDamage(fault)) throw fault;
    const aside = setAside(file);
    notices.push(
      `the database ${file} was damaged (${(fault as Error).message}); it was kept as ${aside} and a new one begun; ` +
        'channels, models and watches have to be set up again, or a copy of the folder put back',
    );
    return open(file);
  }
}

/** Leaves word beside a database that it was found damaged, so that the next start reads all of it. */
export function noteDamage(dataFolder: string): void {
  try {
    writeFileSync(damageNote(join(dataFolder, DATABASE_FILE)), '');
  } catch {
    // a disk that takes nothing more: the next start will meet the damage as this one did
  }
}

const damageNote = (file: string) => `${file}-damaged`;

/**
 * Opens the folder's database for reading only, also while a server writes to it.
 *
 * @throws StoreError NO_STORE where there is none, NEWER where it was written by a newer program
 */
export function openDatabaseReader(dataFolder: string): Database.Database {
  const file = join(dataFolder, DATABASE_FILE);
  if (!existsSync(file))
    throw new StoreError(
      'NO_STORE',
      `there is no ${DATABASE_FILE} in ${dataFolder}; expected the data folder of a server that has recorded; ` +
        'name it with --data DIR or FORESHIFT_DATA',
    );
  const database = new Database(file, { readonly: true });
  try {
    refuseOther(database, file);
  } catch (fault) {
    database.close();
    throw fault;
  }
  return database;
}

function open(file: string): Database.Database {
  const database = new Database(file);
  try {
    refuseOther(database, file);
    // only of use before the first table: what is freed can then be given back to the disk in small steps
    if (schemaVersion(database) === 0) database.pragma('auto_vacuum = INCREMENTAL');
    database.pragma('journal_mode = WAL');
    database.pragma('synchronous = FULL');
    database.pragma(`journal_size_limit = ${LARGEST_LOG_BYTES}`);
    bringForward(database);
    if (statSync(file).size <= READ_THROUGH_BYTES || existsSync(damageNote(file))) refuseDamaged(database);
    rmSync(damageNote(file), { force: true });
  } catch (fault) {
    database.close();
    throw fault;
  }
  return database;
}

function bringForward(database: Database.Database): void {
  try {
    migrate(database);
    makePruneTables(database);
  } catch (fault) {
    // its tables are not those that its version has
    if ((fault as { code?: unknown }).code !== 'SQLITE_ERROR') throw fault;
    throw damage((fault as Error).message);
  }
}

function refuseOther(database: Database.Database, file: string): void {
  const version = schemaVersion(database);
  if (version < 0 || version > HIGHEST_VERSION) throw damage(`its version is ${version}`);
  if (version > SCHEMA_VERSION)
    throw new StoreError(
      'NEWER',
      `${file} has version ${version}, this program reads up to ${SCHEMA_VERSION}; ` +
        'use the newer Foreshift that wrote it, or another data folder with --data DIR',
    );
}

function refuseDamaged(database: Database.Database): void {
  const found = database.pragma('quick_check(1)', { simple: true });
  if (found !== 'ok') throw damage(inOneLine(String(found)));
}

function setAside(file: string): string {
  const stamp = new Date().toISOString().replace(/[:.]/g, '-');
  const aside = file.replace(/\.db$/, `.damaged-${stamp}.db`);
  for (const end of ['', '-wal', '-shm']) if (existsSync(file + end)) renameSync(file + end, aside + end);
  return aside;
}

/** A finding of SQLite's own check as part of a sentence: it heads it with a line of its own. */
export const inOneLine = (found: string) => found.replace(/^\*\*\*.*\*\*\*\n/, '').replaceAll('\n', '; ');

const damage = (found: string) => Object.assign(new Error(found), { code: 'SQLITE_CORRUPT' });
