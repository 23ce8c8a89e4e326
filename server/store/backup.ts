import {
  closeSync,
  copyFileSync,
  existsSync,
  fsyncSync,
  openSync,
  renameSync,
  rmSync,
  statSync,
} from 'node:fs';
import { dirname, join } from 'node:path';
import Database from 'better-sqlite3';
import { claimFolder } from './lock.ts';
import { DATABASE_FILE, inOneLine, openDatabaseReader } from './openDatabase.ts';
import { SCHEMA_VERSION, schemaVersion } from './schema.ts';
import { StoreError } from './storeError.ts';

/** What a backup holds. */
export interface BackupFacts {
  file: string;
  bytes: number;
  /** version of its database */
  version: number;
  /** server clock, Unix seconds, when it was made, and the program that made it */
  madeAt: number;
  program: string;
  channels: number;
  /** samples of channels in it */
  samples: number;
  warnings: number;
}

/** What goes into a backup beside the database. */
export interface BackupLabel {
  madeAt: number;
  program: string;
  /** text of settings.json; null where there is none */
  settings: string | null;
}

/** SQLite's number for what `openDatabase` asks for. */
const INCREMENTAL = 2;

/**
 * Copies the database of a data folder, as it is at one moment, into one file, also while a server writes to it. The
 * file appears under its name only when it was read through and is on disk.
 *
 * @throws StoreError NO_STORE, NEWER, DAMAGED where the database cannot be read, FULL where the copy finds no room
 */
export function writeBackup(dataFolder: string, file: string, label: BackupLabel): BackupFacts {
  const partial = `${file}.partial`;
  rmSync(partial, { force: true });
  const source = openDatabaseReader(dataFolder);
  try {
    source.prepare('VACUUM INTO ?').run(partial);
    source.close();
    const facts = labelled(partial, label);
    toDisk(partial);
    renameSync(partial, file);
    toDisk(dirname(file));
    return { ...facts, file, bytes: statSync(file).size };
  } catch (fault) {
    for (const end of ['', '-journal']) rmSync(partial + end, { force: true });
    throw fault;
  } finally {
    source.close();
  }
}

/**
 * Puts a backup into a data folder that holds no database; the database appears under its name only when all of it is
 * on disk.
 *
 * @returns what it holds, and the text of settings.json in it
 * @throws StoreError NOT_A_BACKUP, DAMAGED, NEWER; IN_USE where a server runs on the folder
 */
export function readBackup(
  file: string,
  dataFolder: string,
): { facts: BackupFacts; settings: string | null } {
  const backup = checkedBackup(file);
  const target = join(dataFolder, DATABASE_FILE);
  const partial = `${target}.partial`;
  const release = claimFolder(dataFolder);
  try {
    copyFileSync(file, partial);
    const database = new Database(partial);
    database.exec('DROP TABLE backup');
    database.close();
    toDisk(partial);
    renameSync(partial, target);
    toDisk(dataFolder);
    return { facts: { ...backup.facts, file, bytes: statSync(file).size }, settings: backup.settings };
  } catch (fault) {
    for (const end of ['', '-journal']) rmSync(partial + end, { force: true });
    throw fault;
  } finally {
    release();
  }
}

/** Whether a server, or anything else, writes to a data folder now. */
export function isInUse(dataFolder: string): boolean {
  if (!existsSync(join(dataFolder, 'foreshift.lock'))) return false;
  try {
    claimFolder(dataFolder)();
    return false;
  } catch (fault) {
    if (fault instanceof StoreError && fault.code === 'IN_USE') return true;
    throw fault;
  }
}

function labelled(partial: string, { madeAt, program, settings }: BackupLabel): Facts {
  const copy = new Database(partial);
  try {
    // an old database gives nothing back to the disk; its copy will
    if (copy.pragma('auto_vacuum', { simple: true }) !== INCREMENTAL) {
      copy.pragma('auto_vacuum = INCREMENTAL');
      copy.exec('VACUUM');
    }
    copy.exec('CREATE TABLE backup (madeAt REAL NOT NULL, program TEXT NOT NULL, settings TEXT) STRICT');
    copy.prepare('INSERT INTO backup VALUES (?, ?, ?)').run(madeAt, program, settings);
    refuseDamaged(copy, partial);
    return factsOf(copy);
  } finally {
    copy.close();
  }
}

type Facts = Omit<BackupFacts, 'file' | 'bytes'>;

function factsOf(database: Database.Database): Facts {
  const { channels, samples } = database
    .prepare(
      "SELECT count(*) AS channels, coalesce(sum(samples), 0) AS samples FROM series WHERE kind = 'channel'",
    )
    .get() as { channels: number; samples: number };
  const warnings = database.prepare('SELECT count(*) FROM warnings').pluck().get() as number;
  const { madeAt, program } = database.prepare('SELECT madeAt, program FROM backup').get() as BackupLabel;
  return { version: schemaVersion(database), madeAt, program, channels, samples, warnings };
}

function checkedBackup(file: string): { facts: Facts; settings: string | null } {
  let backup: Database.Database | null = null;
  try {
    backup = new Database(file, { readonly: true });
    const version = schemaVersion(backup);
    if (version > SCHEMA_VERSION) throw newer(file, version);
    if (backup.prepare("SELECT 1 FROM sqlite_master WHERE name = 'backup'").get() === undefined)
      throw new StoreError(
        'NOT_A_BACKUP',
        `${file} is a database but no backup; expected a file that foreshift backup made`,
      );
    refuseDamaged(backup, file);
    const settings = backup.prepare('SELECT settings FROM backup').pluck().get() as string | null;
    return { facts: factsOf(backup), settings };
  } catch (fault) {
    const { code, message } = fault as { code?: unknown; message: string };
    if (fault instanceof StoreError) throw fault;
    const isOther = code === 'SQLITE_NOTADB';
    throw new StoreError(
      isOther ? 'NOT_A_BACKUP' : 'DAMAGED',
      `${file} ${isOther ? 'is no backup' : 'is damaged'} (${message}); use another file that foreshift backup made`,
    );
  } finally {
    backup?.close();
  }
}

const newer = (file: string, version: number) =>
  new StoreError(
    'NEWER',
    `${file} has version ${version}, this program reads up to ${SCHEMA_VERSION}; use the newer Foreshift that made it`,
  );

function refuseDamaged(database: Database.Database, file: string): void {
  const found = database.pragma('integrity_check(1)', { simple: true });
  if (found === 'ok') return;
  throw new StoreError(
    'DAMAGED',
    `${file} is damaged (${inOneLine(String(found))}); use another file that foreshift backup made`,
  );
}

function toDisk(path: string): void {
  const opened = openSync(path, 'r');
  try {
    fsyncSync(opened);
  } finally {
    closeSync(opened);
  }
}
