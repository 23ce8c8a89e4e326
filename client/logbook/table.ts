import type { LogbookEntry } from '../../shared-types/logbook.ts';
import { createCard } from '../card/card.ts';
import { element, mark, say } from '../dom.ts';
import { createLines, type Lines, put, remove } from './lines.ts';
import { cardOf } from './requests.ts';
import { createDayRow, createRow, dayText, type RowActions } from './row.ts';

/** Rows in a block: the browser passes over blocks that are out of sight, so that ten thousand rows scroll smoothly. */
const BLOCK = 50;

/** The logbook's table. */
export interface LogTable {
  root: HTMLElement;
  lines: Lines;
  clear(): void;
  /** puts lines in their places */
  add(entries: readonly LogbookEntry[]): void;
  remove(key: string): void;
  /** moves the focus by some rows */
  move(by: number): void;
}

export interface TableNeeds extends Pick<RowActions, 'horizonOf'> {
  unitOf(channel: string | null): string;
  switchWordOf(watch: string | null): string;
}

const COLUMNS = ['Time (UTC)', 'What', 'Channel', 'In words', 'What became of it', 'Look'];

/** Creates an empty table. */
export function createTable(needs: TableNeeds): LogTable {
  const lines = createLines();
  const rows = new Map<string, HTMLElement>();
  const cards = new Map<string, HTMLElement>();
  const head = element(
    'div',
    'logRow logHead',
    ...COLUMNS.map((name) => {
      const made = element('div', '', name);
      mark(made, 'role', 'columnheader');
      return made;
    }),
  );
  mark(head, 'role', 'row');
  const heads = element('div', '', head);
  mark(heads, 'role', 'rowgroup');
  const root = element('div', 'logTable', heads);
  mark(root, 'role', 'table');
  mark(root, 'aria-label', 'The logbook, newest first');

  const newBlock = (before: Node | null) => {
    const block = element('div', 'logBlock');
    mark(block, 'role', 'rowgroup');
    root.insertBefore(block, before);
    return block;
  };
  const dropCard = (key: string) => {
    cards.get(key)?.remove();
    cards.delete(key);
    mark(rows.get(key)?.querySelector('button') ?? head, 'aria-expanded', rows.has(key) ? 'false' : null);
  };
  const drop = (key: string) => {
    const row = rows.get(key);
    if (row === undefined) return;
    dropCard(key);
    const block = row.parentElement!;
    row.remove();
    rows.delete(key);
    if (block.childElementCount === 0) block.remove();
  };

  const toggleCard = async (entry: LogbookEntry, row: HTMLElement) => {
    if (cards.has(entry.key)) return dropCard(entry.key);
    const inside = element(
      'div',
      'logCard',
      element('p', 'quietLine', 'Reading the last moments before it …'),
    );
    mark(inside, 'role', 'cell');
    mark(inside, 'aria-colspan', '6');
    const host = element('div', 'logCardRow', inside);
    mark(host, 'role', 'row');
    cards.set(entry.key, host);
    mark(row.querySelector('button')!, 'aria-expanded', 'true');
    row.after(host);
    try {
      const card = await cardOf(entry.switch!.id);
      const about = { unit: needs.unitOf(card.channel), switchWord: needs.switchWordOf(entry.watch) };
      inside.replaceChildren(createCard(card, about));
    } catch (error) {
      const fault = element('p', 'fault');
      say(fault, error instanceof Error ? error.message : String(error));
      mark(fault, 'role', 'alert');
      inside.replaceChildren(fault);
    }
  };
  const actions: RowActions = {
    horizonOf: needs.horizonOf,
    toggleCard: (entry, row) => void toggleCard(entry, row),
  };

  /** Puts a row before the one of the line below it, at the end of the last block with room, or into a new one. */
  const place = (row: HTMLElement, below: LogbookEntry | undefined) => {
    const next = below === undefined ? undefined : rows.get(below.key);
    if (next !== undefined) {
      const dayRow = next.previousElementSibling?.classList.contains('logDay')
        ? next.previousElementSibling
        : null;
      const target = dayRow ?? next;
      const block = next.parentElement!;
      if (
        target === block.firstElementChild &&
        block.previousElementSibling === heads &&
        block.childElementCount >= 2 * BLOCK
      )
        newBlock(block).append(row);
      else block.insertBefore(row, target);
      return;
    }
    const last = root.lastElementChild as HTMLElement;
    const roomy = last !== heads && last.childElementCount < BLOCK;
    (roomy ? last : newBlock(null)).append(row);
  };
  /** A row of another day than the one above it is headed by its day. */
  const headDays = (from: number, to: number) => {
    for (let i = Math.max(0, from); i <= Math.min(to, lines.entries.length - 1); i++) {
      const row = rows.get(lines.entries[i]!.key)!;
      const day = dayText(lines.entries[i]!.time);
      const wanted = i === 0 || dayText(lines.entries[i - 1]!.time) !== day;
      const above = row.previousElementSibling;
      const has = above?.classList.contains('logDay') ?? false;
      if (has && (!wanted || above!.textContent !== day)) above!.remove();
      if (wanted && !(has && above!.isConnected)) row.before(createDayRow(day));
    }
  };

  const addOne = (entry: LogbookEntry) => {
    const before = rows.get(entry.key);
    const was = put(lines, entry);
    if (was === 'same') return;
    const row = createRow(entry, actions);
    if (was === 'changed' && before !== undefined) {
      const focused = before.contains(document.activeElement);
      before.replaceWith(row);
      rows.set(entry.key, row);
      mark(
        row.querySelector('button') ?? row,
        'aria-expanded',
        cards.has(entry.key) ? 'true' : row.querySelector('button') ? 'false' : null,
      );
      if (focused) row.focus();
      return;
    }
    drop(entry.key);
    rows.set(entry.key, row);
    const index = lines.entries.indexOf(entry, lines.entries.at(-1) === entry ? lines.entries.length - 1 : 0);
    place(row, lines.entries[index + 1]);
    headDays(index, index + 1);
  };

  return {
    root,
    lines,
    clear: () => {
      lines.entries.length = 0;
      lines.byKey.clear();
      rows.clear();
      cards.clear();
      root.replaceChildren(heads);
    },
    add: (entries) => {
      for (const entry of entries) addOne(entry);
    },
    remove: (key) => {
      const entry = lines.byKey.get(key);
      if (entry === undefined) return;
      const index = lines.entries.indexOf(entry);
      const above = rows.get(key)?.previousElementSibling;
      if (above?.classList.contains('logDay')) above.remove();
      remove(lines, key);
      drop(key);
      headDays(index, index);
    },
    move: (by) => {
      const focused = (document.activeElement?.closest('.logRow') as HTMLElement | null)?.dataset.key;
      const from = focused === undefined ? -1 : lines.entries.findIndex(({ key }) => key === focused);
      const to = from < 0 ? (by > 0 ? 0 : -1) : Math.min(lines.entries.length - 1, Math.max(0, from + by));
      const row = rows.get(lines.entries[to]?.key ?? '');
      row?.focus({ preventScroll: true });
      row?.scrollIntoView({ block: 'nearest' });
    },
  };
}
