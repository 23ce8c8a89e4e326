import type { Database } from 'better-sqlite3';

/**
 * What is known of samples that are no longer there, from database version 3 on.
 *
 * `pruned`: the blocks [block, block + blocks) of a segment are gone. `recordings`: how many recordings began in them,
 * so that those after them keep their numbers; `last`: time of the newest finite sample in them, NULL without one.
 * `arrivals`: blocks with this id or a higher one arrived at `at` (server clock, Unix seconds) or later.
 */
const TABLES = `
  CREATE TABLE IF NOT EXISTS pruned (
    segment INTEGER NOT NULL REFERENCES segments,
    block INTEGER NOT NULL,
    blocks INTEGER NOT NULL,
    recordings INTEGER NOT NULL,
    last REAL,
    PRIMARY KEY (segment, block)
  ) STRICT, WITHOUT ROWID;
  CREATE TABLE IF NOT EXISTS arrivals (id INTEGER PRIMARY KEY, at REAL NOT NULL) STRICT;
`;

/** Makes the tables where they are missing. */
export function makePruneTables(database: Database): void {
  database.exec(TABLES);
}

/** Whether a database has them: one that no server has brought forward yet has lost nothing either. */
export function hasPruneTables(database: Database): boolean {
  return (
    database.prepare("SELECT 1 FROM sqlite_master WHERE type = 'table' AND name = 'pruned'").get() !==
    undefined
  );
}
