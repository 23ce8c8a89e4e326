import type { Database } from 'better-sqlite3';

/** Steps that bring a database from one version to the next; its version is how many of them it has seen. */
const MIGRATIONS: readonly string[] = [
  `
  CREATE TABLE series (
    id INTEGER PRIMARY KEY,
    kind TEXT NOT NULL CHECK (kind IN ('channel', 'trace')),
    name TEXT NOT NULL,
    description TEXT NOT NULL DEFAULT '{}',
    samples INTEGER NOT NULL DEFAULT 0,
    holes INTEGER NOT NULL DEFAULT 0,
    gaps INTEGER NOT NULL DEFAULT 0,
    first REAL, newest REAL, value REAL,
    UNIQUE (kind, name)
  ) STRICT;
  -- samples of a series whose times ascend; a step back in time begins another segment
  CREATE TABLE segments (
    id INTEGER PRIMARY KEY,
    series INTEGER NOT NULL REFERENCES series,
    ordinal INTEGER NOT NULL,
    samples INTEGER NOT NULL,
    first REAL NOT NULL, last REAL NOT NULL
  ) STRICT;
  CREATE INDEX segments_by_ordinal ON segments (series, ordinal);
  -- block b of a segment holds its samples from 1024 b on
  CREATE TABLE blocks (
    id INTEGER PRIMARY KEY,
    segment INTEGER NOT NULL REFERENCES segments,
    block INTEGER NOT NULL,
    first REAL NOT NULL,
    samples INTEGER NOT NULL,
    times BLOB NOT NULL,
    data BLOB NOT NULL,
    UNIQUE (segment, block)
  ) STRICT;
  CREATE INDEX blocks_by_time ON blocks (segment, first);
  -- row b of a level holds its nodes from 32 b on; a node of level n covers 32^n samples, all of them stored
  CREATE TABLE pyramid (
    id INTEGER PRIMARY KEY,
    segment INTEGER NOT NULL REFERENCES segments,
    level INTEGER NOT NULL,
    block INTEGER NOT NULL,
    nodes BLOB NOT NULL,
    UNIQUE (segment, level, block)
  ) STRICT;
  CREATE TABLE runs (
    id INTEGER PRIMARY KEY,
    channel TEXT NOT NULL,
    run TEXT NOT NULL,
    next INTEGER NOT NULL,
    UNIQUE (channel, run)
  ) STRICT;
  CREATE TABLE digests (
    run INTEGER NOT NULL REFERENCES runs,
    seq INTEGER NOT NULL,
    digest INTEGER NOT NULL,
    PRIMARY KEY (run, seq)
  ) STRICT, WITHOUT ROWID;
  CREATE TABLE models (name TEXT PRIMARY KEY, json TEXT NOT NULL) STRICT;
  CREATE TABLE watches (watch TEXT PRIMARY KEY, settings TEXT NOT NULL, snapshot BLOB) STRICT;
  CREATE TABLE warnings (
    id INTEGER PRIMARY KEY AUTOINCREMENT,
    watch TEXT NOT NULL, at REAL NOT NULL, channels TEXT NOT NULL, json TEXT NOT NULL,
    UNIQUE (watch, at)
  ) STRICT;
  CREATE TABLE switches (
    id INTEGER PRIMARY KEY AUTOINCREMENT,
    watch TEXT NOT NULL, at REAL NOT NULL, channels TEXT NOT NULL, json TEXT NOT NULL,
    UNIQUE (watch, at)
  ) STRICT;
  CREATE TABLE log (id INTEGER PRIMARY KEY AUTOINCREMENT, json TEXT NOT NULL) STRICT;
  `,
  `
  CREATE TABLE marks (id INTEGER PRIMARY KEY AUTOINCREMENT, json TEXT NOT NULL) STRICT;
  CREATE TABLE conditions (id INTEGER PRIMARY KEY AUTOINCREMENT, json TEXT NOT NULL) STRICT;
  CREATE TABLE rehearsals (id TEXT PRIMARY KEY, state TEXT NOT NULL, result BLOB NOT NULL) STRICT;
  `,
  `
  -- what receivers are sent; body and until only while it is pending
  CREATE TABLE outbox (
    id INTEGER PRIMARY KEY AUTOINCREMENT,
    receiver TEXT NOT NULL, event TEXT NOT NULL,
    warning INTEGER NOT NULL,
    pending INTEGER NOT NULL,
    json TEXT NOT NULL,
    UNIQUE (receiver, event)
  ) STRICT;
  CREATE INDEX outbox_pending ON outbox (id) WHERE pending = 1;
  CREATE INDEX outbox_by_warning ON outbox (warning);
  CREATE TABLE delays (watch TEXT PRIMARY KEY, json TEXT NOT NULL) STRICT;
  `,
];

/** Version of the database this program writes. */
export const SCHEMA_VERSION = MIGRATIONS.length;

/** The version of an open database; 0 for an empty one. */
export function schemaVersion(database: Database): number {
  return database.pragma('user_version', { simple: true }) as number;
}

/** Brings an open database of an older version (or an empty one) forward to SCHEMA_VERSION, in one transaction. */
export function migrate(database: Database): void {
  const from = schemaVersion(database);
  if (from === SCHEMA_VERSION) return;
  database.transaction(() => {
    for (const step of MIGRATIONS.slice(from)) database.exec(step);
    database.pragma(`user_version = ${SCHEMA_VERSION}`);
  })();
}
