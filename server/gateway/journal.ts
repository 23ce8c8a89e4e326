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
  /** once a second: writes what could not be written when it happened */
  retry(): void;
  /** resolves once everything told so far is written or given up */
  idle(): Promise<void>;
}

/** Something that happened and is to be written again; `late` gets what the store answered. */
interface Unwritten {
  attempt(): Promise<unknown>;
  late(result: never): void;
}

/** So much of what could not be written is kept in memory, to be written when there is room again; then the oldest goes. */
const MOST_UNWRITTEN = 20_000;

/**
 * A warning must not wait for the disk: its id is foretold, told with the warning and checked against the one the
 * store gives. They differ only after the store failed to write one; the warning is then told again under its own. What
 * the store fails to write is told at once and written when it can again.
 *
 * @param lastWarning the newest id in the store, 0 when there is none
 * @param serverTime  server clock, Unix seconds
 * @param trouble     told a sentence when something could not be written, null when all of it is
 */
export function createJournal(
  store: Store,
  lastWarning: number,
  serverTime: () => number,
  say: (message: FeedMessage) => void,
  trouble: (text: string | null) => void,
): Journal {
  let newestId = lastWarning;
  let unstored = 0;
  const writing = new Set<Promise<unknown>>();

  let unwritten: Unwritten[] = [];
  let retrying = false;

  const track = (settled: Promise<unknown>) => {
    const tracked: Promise<unknown> = settled.finally(() => writing.delete(tracked));
    writing.add(tracked);
  };
  /** `done` gets null when it is not written yet; `late` the result when it is after all */
  const write = <T>(
    attempt: () => Promise<T>,
    done: (result: T | null) => void,
    late: (result: T) => void = () => {},
  ) => {
    const failed = (error: Error & { code?: string }) => {
      trouble(`what happens is not being recorded: ${error.message}`);
      // what the store will not have for its own sake is not asked of it again
      if (error.code === 'FULL') unwritten.push({ attempt, late });
      if (unwritten.length > MOST_UNWRITTEN) unwritten.shift();
      done(null);
    };
    track(attempt().then(done, failed));
  };

  /** the first alone shows whether there is room again, then many at a time */
  const writeUnwritten = async () => {
    for (let most = 1; unwritten.length > 0; most = 1000) {
      const batch = unwritten.slice(0, most);
      const written = await Promise.allSettled(batch.map(({ attempt }) => attempt()));
      const settled = new Set<Unwritten>();
      written.forEach((one, i) => {
        if (one.status === 'rejected') return;
        settled.add(batch[i]!);
        batch[i]!.late(one.value as never);
      });
      unwritten = unwritten.filter((one) => !settled.has(one));
      if (settled.size < batch.length) return;
    }
    trouble(null);
  };
  const retry = () => {
    if (unwritten.length === 0 || retrying) return;
    retrying = true;
    track(
      writeUnwritten().finally(() => {
        retrying = false;
      }),
    );
  };

  return {
    issue(warning) {
      warning.id = ++newestId;
      const known = (id: number | null) => {
        if (id === null || id === warning.id) return;
        warning.id = id;
        newestId = Math.max(newestId, id);
        say({ kind: 'warning', warning: { ...warning } });
      };
      write(() => store.saveWarning({ ...warning, id: 0 }), known, known);
      say({ kind: 'warning', warning: { ...warning } });
    },
    change(warning) {
      // as it is by then: a later change may be written before this one is tried again
      write(
        () => store.saveWarning({ ...warning }),
        () => {},
      );
      say({ kind: 'warning', warning: { ...warning } });
    },
    noteSwitch(event) {
      write(
        () => store.saveSwitch({ ...event, id: 0 }),
        (id) => {
          event.id = id ?? --unstored;
          say({ kind: 'switch', switch: { ...event } });
        },
        (id) => {
          event.id = id;
        },
      );
    },
    log(entry) {
      const dated = { ...entry, time: serverTime() };
      write(
        () => store.log(dated),
        (id) => say({ kind: 'log', entry: { ...dated, id: id ?? --unstored } }),
      );
    },
    retry,
    async idle() {
      retry();
      while (writing.size > 0) await Promise.all(writing);
    },
  };
}
