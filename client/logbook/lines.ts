import type { LogbookEntry } from '../../shared-types/logbook.ts';

/** The lines that are shown, newest first. Changed in place. */
export interface Lines {
  entries: LogbookEntry[];
  byKey: Map<string, LogbookEntry>;
}

/** No lines yet. */
export function createLines(): Lines {
  return { entries: [], byKey: new Map() };
}

/** Below zero where `a` stands above `b`: the newer first, then by key as the server orders equal times. */
export function order(a: LogbookEntry, b: LogbookEntry): number {
  if (a.time !== b.time) return b.time - a.time;
  const [source, id] = a.key.split(' ') as [string, string];
  const [otherSource, otherId] = b.key.split(' ') as [string, string];
  return source === otherSource ? Number(otherId) - Number(id) : source < otherSource ? 1 : -1;
}

/** Index of the first line that stands below `entry`, or where it stands itself. */
export function indexOf(lines: Lines, entry: LogbookEntry): number {
  let low = 0;
  let high = lines.entries.length;
  while (low < high) {
    const middle = (low + high) >> 1;
    if (order(lines.entries[middle]!, entry) < 0) low = middle + 1;
    else high = middle;
  }
  return low;
}

/** What became of a line: it is new, other than before, moved to another place, or the same. */
export type Put = 'new' | 'changed' | 'moved' | 'same';

/** Puts a line in its place, in place of what was there under its key. */
export function put(lines: Lines, entry: LogbookEntry): Put {
  const before = lines.byKey.get(entry.key);
  if (before !== undefined) {
    const index = indexOf(lines, before);
    if (order(before, entry) === 0) {
      lines.entries[index] = entry;
      lines.byKey.set(entry.key, entry);
      return JSON.stringify(before) === JSON.stringify(entry) ? 'same' : 'changed';
    }
    lines.entries.splice(index, 1);
  }
  lines.entries.splice(indexOf(lines, entry), 0, entry);
  lines.byKey.set(entry.key, entry);
  return before === undefined ? 'new' : 'moved';
}

/** Takes a line out, if it is there. */
export function remove(lines: Lines, key: string): boolean {
  const entry = lines.byKey.get(key);
  if (entry === undefined) return false;
  lines.entries.splice(indexOf(lines, entry), 1);
  return lines.byKey.delete(key);
}

/** The keys of lines that may change without a word: warnings that stand open, switches not judged yet. */
export function unsettled(lines: Lines, most: number): string[] {
  return lines.entries
    .filter(
      (entry) =>
        entry.warning?.outcome === 'open' ||
        entry.switch?.outcome === 'pending' ||
        (entry.warning !== null && entry.warning.acknowledgedAt === null),
    )
    .slice(0, most)
    .map(({ key }) => key);
}
