import type { Database } from 'better-sqlite3';
import type { StoredRun } from './store.ts';

/** Digests kept of a run at least; twice as many are held before the older half goes. */
const DIGESTS_KEPT = 4096;
/** Runs of a channel whose digests are kept; older ones keep their place but not their content check. */
const RUNS_WITH_DIGESTS = 32;

interface OpenRun {
  id: number;
  next: number;
  /** digests below this seq were removed */
  kept: number;
  dirty: boolean;
}

/** Where each producer's run stands; written in the transaction of the samples. */
export interface Runs {
  /** notes a frame as consumed; false where the run has it already */
  consume(channel: string, run: string, seq: number, digest: number): boolean;
  get(channel: string, run: string): StoredRun;
  flush(): void;
  forget(): void;
}

/** Runs over an open, migrated database; the caller holds the transaction. */
export function createRuns(database: Database): Runs {
  const open = new Map<string, OpenRun>();
  const find = database.prepare('SELECT id, next FROM runs WHERE channel = ? AND run = ?');
  const add = database.prepare('INSERT INTO runs (channel, run, next) VALUES (?, ?, 0)');
  const put = database.prepare('UPDATE runs SET next = ? WHERE id = ?');
  const addDigest = database.prepare('INSERT OR REPLACE INTO digests (run, seq, digest) VALUES (?, ?, ?)');
  const digests = database.prepare('SELECT seq, digest FROM digests WHERE run = ? ORDER BY seq');
  const prune = database.prepare('DELETE FROM digests WHERE run = ? AND seq < ?');
  const pruneRuns = database.prepare(
    `DELETE FROM digests WHERE run IN
       (SELECT id FROM runs WHERE channel = ? ORDER BY id DESC LIMIT -1 OFFSET ${RUNS_WITH_DIGESTS})`,
  );

  const openRun = (channel: string, run: string): OpenRun => {
    const key = JSON.stringify([channel, run]);
    const known = open.get(key);
    if (known !== undefined) return known;
    const stored = find.get(channel, run) as { id: number; next: number } | undefined;
    const id = stored?.id ?? Number(add.run(channel, run).lastInsertRowid);
    if (stored === undefined) pruneRuns.run(channel);
    const next = stored?.next ?? 0;
    const fresh = { id, next, kept: Math.max(0, next - 2 * DIGESTS_KEPT), dirty: false };
    open.set(key, fresh);
    return fresh;
  };

  return {
    consume: (channel, run, seq, digest) => {
      const state = openRun(channel, run);
      if (seq < state.next) return false;
      addDigest.run(state.id, seq, digest);
      state.next = seq + 1;
      state.dirty = true;
      if (state.next - state.kept > 2 * DIGESTS_KEPT) {
        state.kept = state.next - DIGESTS_KEPT;
        prune.run(state.id, state.kept);
      }
      return true;
    },
    get: (channel, run) => {
      const stored = find.get(channel, run) as { id: number; next: number } | undefined;
      if (stored === undefined) return { next: 0, digests: new Map() };
      const rows = digests.all(stored.id) as { seq: number; digest: number }[];
      return { next: stored.next, digests: new Map(rows.map((row) => [row.seq, row.digest])) };
    },
    flush: () => {
      for (const state of open.values()) {
        if (state.dirty) put.run(state.next, state.id);
        state.dirty = false;
      }
    },
    forget: () => open.clear(),
  };
}
