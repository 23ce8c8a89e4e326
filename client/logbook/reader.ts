import type { FeedMessage } from '../../shared-types/feed.ts';
import { type Filter, queryOf } from './filter.ts';
import { unsettled } from './lines.ts';
import { linesOf, PAGE_LINES, pageOf } from './requests.ts';
import type { LogTable } from './table.ts';

/** News are asked for together after this many milliseconds. */
const GATHER = 250;
/** Pages looked at for lines that came while the server could not be heard, and lines asked for by key at a time. */
const CATCH_UP_PAGES = 5;
const MOST_KEYS = 200;

/** Where reading stands. */
export type Standing =
  | { kind: 'reading' }
  /** `older`: there are older lines */
  | { kind: 'read'; older: boolean }
  | { kind: 'failed'; why: string };

/** Brings lines into the table: pages of older ones when asked, new and changed ones as the feed tells of them. */
export interface Reader {
  /** the filter as a query, for the exports */
  query(): URLSearchParams;
  standing(): Standing;
  /** begins anew with a filter */
  look(filter: Filter): Promise<void>;
  older(): Promise<void>;
  hear(message: FeedMessage): void;
  /** after a time of not listening: the newest lines until a known one, and what may have been settled meanwhile */
  catchUp(): Promise<void>;
}

/** Creates a reader; `stands` is told whenever its standing changed. */
export function createReader(table: LogTable, stands: () => void): Reader {
  let query = new URLSearchParams();
  let next: string | null = null;
  let turn = 0;
  let standing: Standing = { kind: 'reading' };
  const told = new Set<string>();
  let gathering = false;

  const stand = (now: Standing) => {
    standing = now;
    stands();
  };
  const settled = () => stand({ kind: 'read', older: next !== null });
  const failed = (error: unknown) =>
    stand({ kind: 'failed', why: error instanceof Error ? error.message : String(error) });

  const older = async () => {
    const own = turn;
    stand({ kind: 'reading' });
    try {
      const page = await pageOf(query, next);
      if (own !== turn) return;
      table.add(page.entries);
      next = page.next;
      settled();
    } catch (error) {
      if (own === turn) failed(error);
    }
  };
  const renew = async () => {
    const keys = [...told].slice(0, MOST_KEYS);
    for (const key of keys) told.delete(key);
    const own = turn;
    try {
      const { entries } = await linesOf(query, keys);
      if (own !== turn) return;
      const came = new Set(entries.map(({ key }) => key));
      for (const key of keys) if (!came.has(key)) table.remove(key);
      // what lies below the last line that is shown comes with its own page
      const oldest = next === null ? undefined : table.lines.entries.at(-1);
      table.add(entries.filter((entry) => oldest === undefined || entry.time >= oldest.time));
      if (standing.kind === 'read') settled();
    } catch {
      // the notice of the lost server says it; what was missed is caught up once it is back
    }
    if (told.size > 0) gather();
  };
  const gather = () => {
    if (gathering) return;
    gathering = true;
    setTimeout(() => {
      gathering = false;
      void renew();
    }, GATHER);
  };

  return {
    query: () => query,
    standing: () => standing,
    look: async (filter) => {
      turn++;
      query = queryOf(filter, Date.now() / 1000);
      next = null;
      told.clear();
      table.clear();
      await older();
    },
    older: async () => {
      if (standing.kind !== 'reading') await older();
    },
    hear: (message) => {
      const key = keyOf(message);
      if (key === null) return;
      told.add(key);
      gather();
    },
    catchUp: async () => {
      const own = turn;
      try {
        let before: string | null = null;
        for (let i = 0; i < CATCH_UP_PAGES; i++) {
          const page = await pageOf(query, before);
          if (own !== turn) return;
          const known = page.entries.some(({ key }) => table.lines.byKey.has(key));
          table.add(page.entries);
          before = page.next;
          if (known || before === null || page.entries.length < PAGE_LINES) break;
        }
        for (const key of unsettled(table.lines, MOST_KEYS)) told.add(key);
        if (told.size > 0) gather();
        if (standing.kind === 'failed') next = table.lines.entries.length === 0 ? before : next;
        settled();
      } catch (error) {
        if (own === turn) failed(error);
      }
    },
  };
}

/** The line that a message of the feed is about; null where it is about none. */
export function keyOf(message: FeedMessage): string | null {
  switch (message.kind) {
    case 'warning':
      return `warning ${message.warning.id}`;
    case 'switch':
      // what could not be stored has a number below zero, and no line
      return message.switch.id > 0 ? `switch ${message.switch.id}` : null;
    case 'log':
      return message.entry.id > 0 ? `log ${message.entry.id}` : null;
    default:
      return null;
  }
}
