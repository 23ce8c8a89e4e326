import type { Database } from 'better-sqlite3';
import type { GradedOutcome, LogEntry, SwitchEvent, Warning } from '../../shared-types/warning.ts';
import type { StoredWatch } from './store.ts';
import { StoreError } from './storeError.ts';

/** Which warnings or switches are asked for; see `Store`. */
export interface EventQuery {
  channel?: string;
  watch?: string;
  after?: number;
  most?: number;
  newest?: boolean;
  since?: number;
}

/** Models, watches, warnings, switches and the log; each as the method of the same name of `Store`. */
export interface Records {
  saveModel(name: string, json: string): void;
  model(name: string): string | null;
  models(): { name: string; json: string }[];
  saveWatch(watch: StoredWatch): void;
  watches(): StoredWatch[];
  /** @throws StoreError FAILED where there is no such watch */
  requireWatch(watch: string): void;
  saveSnapshot(watch: string, snapshot: Uint8Array): void;
  saveWarning(warning: Warning): number;
  warnings(query: EventQuery): Warning[];
  saveSwitch(event: SwitchEvent): number;
  switches(query: EventQuery): SwitchEvent[];
  log(entry: Omit<LogEntry, 'id'>): number;
  logEntries(query: { after?: number; most?: number; newest?: boolean }): LogEntry[];
}

/** Records over an open, migrated database; the caller holds the transaction. */
export function createRecords(database: Database): Records {
  return {
    ...modelRecords(database),
    ...watchRecords(database),
    ...eventRecords(database),
    ...logRecords(database),
  };
}

function modelRecords(database: Database) {
  const put = database.prepare(
    'INSERT INTO models (name, json) VALUES (?, ?) ON CONFLICT (name) DO UPDATE SET json = excluded.json',
  );
  const get = database.prepare('SELECT json FROM models WHERE name = ?').pluck();
  const all = database.prepare('SELECT name, json FROM models ORDER BY rowid');
  return {
    saveModel: (name: string, json: string) => {
      put.run(name, json);
    },
    model: (name: string) => (get.get(name) as string | undefined) ?? null,
    models: () => all.all() as { name: string; json: string }[],
  };
}

function watchRecords(database: Database) {
  const put = database.prepare(
    `INSERT INTO watches (watch, settings, snapshot) VALUES (?, ?, ?)
     ON CONFLICT (watch) DO UPDATE SET settings = excluded.settings,
       snapshot = coalesce(excluded.snapshot, watches.snapshot)`,
  );
  const all = database.prepare('SELECT watch, settings, snapshot FROM watches ORDER BY rowid');
  const find = database.prepare('SELECT 1 FROM watches WHERE watch = ?');
  const putSnapshot = database.prepare('UPDATE watches SET snapshot = ? WHERE watch = ?');
  return {
    saveWatch: (watch: StoredWatch) => {
      put.run(watch.watch, watch.settings, watch.snapshot);
    },
    watches: () =>
      (all.all() as StoredWatch[]).map((row) => ({
        ...row,
        snapshot: row.snapshot === null ? null : Uint8Array.from(row.snapshot),
      })),
    requireWatch: (watch: string) => {
      if (find.get(watch) === undefined)
        throw new StoreError(
          'FAILED',
          `there is no watch ${watch} to save a snapshot of; save the watch first`,
        );
    },
    saveSnapshot: (watch: string, snapshot: Uint8Array) => {
      putSnapshot.run(snapshot, watch);
    },
  };
}

function eventRecords(database: Database) {
  const warnings = events<Warning>(database, 'warnings', mergeReplayed);
  const switches = events<SwitchEvent>(database, 'switches', (event, stored) => ({
    ...event,
    outcome: event.outcome === 'pending' ? stored.outcome : event.outcome,
    warning: event.warning ?? stored.warning,
    lead: event.lead ?? stored.lead,
    ...(stored.loggedAt === undefined ? {} : { loggedAt: stored.loggedAt }),
  }));
  return {
    saveWarning: (warning: Warning) => warnings.save(warning, warning.channels),
    warnings: warnings.query,
    saveSwitch: (event: SwitchEvent) => switches.save(event, [event.channel]),
    switches: switches.query,
  };
}

/** A warning said again by a replay knows nothing of what people and the grading did to it since. */
function mergeReplayed(warning: Warning, stored: Warning): Warning {
  const told = gradedOf(warning);
  const graded = told === 'open' ? stored : warning;
  const outcome = gradedOf(graded);
  // a replay does not speak of it; null takes it back
  const acted = warning.acted === undefined ? stored.acted : warning.acted;
  return {
    ...warning,
    madeAt: stored.madeAt,
    quiet: stored.quiet,
    ...(stored.called === undefined ? {} : { called: stored.called }),
    deliveredAt: warning.deliveredAt ?? stored.deliveredAt,
    acknowledgedAt: warning.acknowledgedAt ?? stored.acknowledgedAt,
    acknowledgedBy: warning.acknowledgedBy ?? stored.acknowledgedBy,
    outcome: acted ? 'acted' : outcome,
    ...(acted === undefined ? {} : { acted: acted && { ...acted, outcome } }),
    switchAt: graded.switchAt,
    lead: graded.lead,
  };
}

/** What a warning is by grading alone, whether it was acted on or not. */
const gradedOf = ({ outcome, acted }: Warning): GradedOutcome =>
  acted ? acted.outcome : outcome === 'acted' ? 'open' : outcome;

function events<E extends { id: number; watch: string; at: number }>(
  database: Database,
  table: 'warnings' | 'switches',
  merge: (event: E, stored: E) => E,
) {
  const find = database.prepare(`SELECT id, json FROM ${table} WHERE watch = ? AND at = ?`);
  const add = database.prepare(`INSERT INTO ${table} (watch, at, channels, json) VALUES (?, ?, ?, ?)`);
  const put = database.prepare(`UPDATE ${table} SET channels = ?, json = ? WHERE id = ?`);
  const select = (newest: boolean) =>
    database.prepare(
      `SELECT id, json FROM ${table}
       WHERE id > @after AND (@watch IS NULL OR watch = @watch) AND (@since IS NULL OR at >= @since)
         AND (@channel IS NULL OR EXISTS (SELECT 1 FROM json_each(channels) WHERE value = @channel))
       ORDER BY id ${newest ? 'DESC' : 'ASC'} LIMIT @most`,
    );
  const [oldestFirst, newestFirst] = [select(false), select(true)];
  const read = (row: { id: number; json: string }): E => ({ ...(JSON.parse(row.json) as E), id: row.id });

  return {
    save: (event: E, channels: string[]): number => {
      if (!Number.isFinite(event.at))
        throw new StoreError(
          'FAILED',
          `a warning or switch at ${event.at} cannot be stored; expected a finite time`,
        );
      const row = find.get(event.watch, event.at) as { id: number; json: string } | undefined;
      const kept = row !== undefined && event.id === 0 ? merge(event, read(row)) : event;
      if (row === undefined)
        return Number(
          add.run(event.watch, event.at, JSON.stringify(channels), JSON.stringify(kept)).lastInsertRowid,
        );
      put.run(JSON.stringify(channels), JSON.stringify(kept), row.id);
      return row.id;
    },
    query: (query: EventQuery): E[] => {
      const rows = (query.newest === true ? newestFirst : oldestFirst).all({
        after: query.after ?? -1,
        watch: query.watch ?? null,
        since: query.since ?? null,
        channel: query.channel ?? null,
        most: query.most ?? -1,
      }) as { id: number; json: string }[];
      const found = rows.map(read);
      return query.newest === true ? found.reverse() : found;
    },
  };
}

function logRecords(database: Database) {
  const add = database.prepare('INSERT INTO log (json) VALUES (?)');
  const select = (order: string) =>
    database.prepare(`SELECT id, json FROM log WHERE id > ? ORDER BY id ${order} LIMIT ?`);
  const [oldestFirst, newestFirst] = [select('ASC'), select('DESC')];
  return {
    log: (entry: Omit<LogEntry, 'id'>) => Number(add.run(JSON.stringify(entry)).lastInsertRowid),
    logEntries: (query: { after?: number; most?: number; newest?: boolean }): LogEntry[] => {
      const statement = query.newest === true ? newestFirst : oldestFirst;
      const rows = statement.all(query.after ?? -1, query.most ?? -1) as { id: number; json: string }[];
      const found = rows.map((row) => ({ ...(JSON.parse(row.json) as LogEntry), id: row.id }));
      return query.newest === true ? found.reverse() : found;
    },
  };
}
