import type { Database } from 'better-sqlite3';
import type { Mark, StoredCondition } from '../../shared-types/rehearsal.ts';
import type { StoredRehearsal } from './store.ts';

/** What is left out; each as the method of the same name of `Store`. */
export interface LeftOutRecords {
  marks(): Mark[];
  conditions(): StoredCondition[];
  saveMark(mark: Mark): number;
  removeMark(id: number): void;
  saveCondition(condition: StoredCondition): number;
  removeCondition(id: number): void;
}

/** Marks and conditions over an open, migrated database; the caller holds the transaction. */
export function createLeftOutRecords(database: Database): LeftOutRecords {
  const marks = numbered<Mark>(database, 'marks');
  const conditions = numbered<StoredCondition>(database, 'conditions');
  return {
    marks: marks.all,
    conditions: conditions.all,
    saveMark: marks.save,
    removeMark: marks.remove,
    saveCondition: conditions.save,
    removeCondition: conditions.remove,
  };
}

/** The same for reading only, also of a database from before there were such tables. */
export function readLeftOut(database: Database): Pick<LeftOutRecords, 'marks' | 'conditions'> {
  const there = database.prepare("SELECT 1 FROM sqlite_master WHERE type = 'table' AND name = 'marks'");
  const records = there.get() === undefined ? null : createLeftOutRecords(database);
  return { marks: () => records?.marks() ?? [], conditions: () => records?.conditions() ?? [] };
}

function numbered<R extends { id: number }>(database: Database, table: 'marks' | 'conditions') {
  const add = database.prepare(`INSERT INTO ${table} (json) VALUES (?)`);
  const put = database.prepare(`UPDATE ${table} SET json = ? WHERE id = ?`);
  const remove = database.prepare(`DELETE FROM ${table} WHERE id = ?`);
  const all = database.prepare(`SELECT id, json FROM ${table} ORDER BY id`);
  return {
    save: (record: R): number => {
      const json = JSON.stringify(record);
      if (record.id === 0) return Number(add.run(json).lastInsertRowid);
      put.run(json, record.id);
      return record.id;
    },
    remove: (id: number): void => {
      remove.run(id);
    },
    all: (): R[] =>
      (all.all() as { id: number; json: string }[]).map(({ id, json }) => ({
        ...(JSON.parse(json) as R),
        id,
      })),
  };
}

/** Finished rehearsals; each as the method of the same name of `Store`. */
export function createRehearsalRecords(database: Database) {
  const put = database.prepare(
    `INSERT INTO rehearsals (id, state, result) VALUES (?, ?, ?)
     ON CONFLICT (id) DO UPDATE SET state = excluded.state, result = excluded.result`,
  );
  const remove = database.prepare('DELETE FROM rehearsals WHERE id = ?');
  const all = database.prepare('SELECT id, state FROM rehearsals ORDER BY rowid');
  const get = database.prepare('SELECT result FROM rehearsals WHERE id = ?').pluck();
  return {
    saveRehearsal: ({ id, state, result }: StoredRehearsal): void => {
      put.run(id, state, result);
    },
    removeRehearsal: (id: string): void => {
      remove.run(id);
    },
    rehearsals: () => all.all() as Omit<StoredRehearsal, 'result'>[],
    rehearsalResult: (id: string): Uint8Array | null => {
      const result = get.get(id) as Uint8Array | undefined;
      return result === undefined ? null : Uint8Array.from(result);
    },
  };
}
