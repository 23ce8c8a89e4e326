import type { FeedMessage } from '../../shared-types/feed.ts';
import type { LogEntry, SwitchEvent, Warning } from '../../shared-types/warning.ts';
import type { Store } from '../store/store.ts';

/** Writes what happened to the store and tells the pages. */
export interface Journal {
  /** gives a new warning its id, writes it and tells it at once */
  issue(warning: Warning): void;
  /** writes a changed warning and tells it */
  change(warning: Warning): void;
  noteSwitch(event: SwitchEvent): void;
  log(entry: Omit<LogEntry, 'id' | 'time'>): void;
  /** resolves once everything told so far is written or given up */
  idle(): Promise<void>;
}

/**
 * A warning must not wait for the disk: its id is foretold, told with the warning and checked against the one the
 * store gives. They differ only after the store failed to write one; the warning is then told again under its own.
 *
 * @param lastWarning the newest id in the store, 0 when there is none
 * @param serverTime  server clock, Unix seconds
 * @param failed      told a sentence when something could not be written
 */
export function createJournal(
  store: Store,
  lastWarning: number,
  serverTime: () => number,
  say: (message: FeedMessage) => void,
  failed: (text: string) => void,
): Journal {
  let newestId = lastWarning;
  let unstored = 0;
  const writing = new Set<Promise<unknown>>();

  const write = <T>(written: Promise<T>, done: (result: T | null) => void) => {
    const settled: Promise<unknown> = written
      .then(done, (error: Error) => {
        failed(`what happens is not being recorded: ${error.message}`);
        done(null);
      })
      .finally(() => writing.delete(settled));
    writing.add(settled);
  };

  return {
    issue(warning) {
      warning.id = ++newestId;
      write(store.saveWarning({ ...warning, id: 0 }), (id) => {
        if (id === null || id === warning.id) return;
        warning.id = id;
        newestId = Math.max(newestId, id);
        say({ kind: 'warning', warning });
      });
      say({ kind: 'warning', warning: { ...warning } });
    },
    change(warning) {
      write(store.saveWarning({ ...warning }), () => {});
      say({ kind: 'warning', warning: { ...warning } });
    },
    noteSwitch(event) {
      write(store.saveSwitch({ ...event, id: 0 }), (id) => {
        event.id = id ?? --unstored;
        say({ kind: 'switch', switch: { ...event } });
      });
    },
    log(entry) {
      const dated = { ...entry, time: serverTime() };
      write(store.log(dated), (id) => say({ kind: 'log', entry: { ...dated, id: id ?? --unstored } }));
    },
    async idle() {
      while (writing.size > 0) await Promise.all(writing);
    },
  };
}
