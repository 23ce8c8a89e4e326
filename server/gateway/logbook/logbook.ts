import type { LogbookEntry, LogbookPage, WarningTimes } from '../../../shared-types/logbook.ts';
import type { LogEntry, SwitchEvent, Warning } from '../../../shared-types/warning.ts';
import type { WatchState } from '../../../shared-types/watch.ts';
import type { LogbookQuery, LogbookRow, LogbookSource } from '../../store/logbook.ts';
import type { Store } from '../../store/store.ts';
import { switchBecame, switchText, warningBecame, warningText } from './logbookWords.ts';

/** What of the logbook is wanted. */
export interface LogbookWish extends Omit<LogbookQuery, 'most' | 'after' | 'watchesOfChannel'> {
  /** in the words of the line, without regard to case; '' or left out: any */
  text?: string;
}

type Watches = Map<string, Pick<WatchState, 'name' | 'channels' | 'switchWord' | 'trigger' | 'use'>>;
type LogbookStore = Pick<Store, 'logbook'>;
type Place = NonNullable<LogbookQuery['after']>;

/** Lines read at a time, and the most a page looks through for a text before it is handed out as it is. */
const ROWS_A_PART = 1000;
const LOOKED_THROUGH = 20_000;

/** The watches by their ids, for the words. */
export const byId = (states: readonly WatchState[]): Watches =>
  new Map(states.map((state) => [state.watch, state]));

/**
 * One page of the logbook, newest first.
 *
 * @param before where an earlier page said that the next begins; null: from the newest on
 * @param most   lines; fewer come when a text is looked for far back: `next` says whether to go on
 */
export async function logbookPage(
  store: LogbookStore,
  watches: Watches,
  wish: LogbookWish,
  before: string | null,
  most: number,
): Promise<LogbookPage> {
  const entries: LogbookEntry[] = [];
  let place = before === null ? null : placeOf(before);
  for (let seen = 0; seen < LOOKED_THROUGH; ) {
    const asked = wish.text ? ROWS_A_PART : most - entries.length;
    const rows = await store.logbook(queryOf(wish, watches, place, asked));
    seen += rows.length;
    for (const row of rows) {
      place = row;
      const entry = entryOf(row, watches);
      if (says(entry, wish.text)) entries.push(entry);
      if (entries.length === most) return { entries, next: cursorOf(row) };
    }
    if (rows.length < asked) return { entries, next: null };
  }
  return { entries, next: place === null ? null : cursorOf(place) };
}

/** All lines that are wanted, newest first, a part at a time. */
export async function* logbookParts(
  store: LogbookStore,
  watches: Watches,
  wish: LogbookWish,
): AsyncGenerator<LogbookEntry[]> {
  for (let next: string | null = null, first = true; first || next !== null; first = false) {
    const page: LogbookPage = await logbookPage(store, watches, wish, next, ROWS_A_PART);
    yield page.entries;
    next = page.next;
  }
}

function queryOf(
  { text: _, ...wish }: LogbookWish,
  watches: Watches,
  after: Place | null,
  most: number,
): LogbookQuery {
  const ofChannel =
    wish.channel === undefined
      ? undefined
      : [...watches].filter(([, { channels }]) => channels.includes(wish.channel!)).map(([id]) => id);
  return {
    ...wish,
    ...(ofChannel === undefined ? {} : { watchesOfChannel: ofChannel }),
    ...(after === null ? {} : { after: { source: after.source, id: after.id, time: after.time } }),
    most,
  };
}

function says(entry: LogbookEntry, text: string | undefined): boolean {
  if (!text) return true;
  const words = [entry.kind, entry.text, entry.became, entry.channel, entry.name, entry.by].join('\n');
  return words.toLowerCase().includes(text.toLowerCase());
}

const cursorOf = ({ source, id, time }: Place): string => `${source} ${id} ${time}`;

/** The place a cursor names; null when it is none. */
export function placeOf(cursor: string): Place | null {
  const [source, id, time, ...rest] = cursor.split(' ');
  const known = source === 'log' || source === 'switch' || source === 'warning';
  if (!known || rest.length > 0 || !id || !time) return null;
  const place = { source: source as LogbookSource, id: Number(id), time: Number(time) };
  return Number.isInteger(place.id) && Number.isFinite(place.time) ? place : null;
}

/** A line as kept, in words. */
export function entryOf(row: LogbookRow, watches: Watches): LogbookEntry {
  const kept = { ...(JSON.parse(row.json) as object), id: row.id };
  const line = { key: `${row.source} ${row.id}`, time: row.time, warning: null, switch: null, waits: false };
  if (row.source === 'warning') return { ...line, ...ofWarning(kept as Warning, watches) };
  if (row.source === 'switch') return { ...line, ...ofSwitch(kept as SwitchEvent, watches) };
  const { kind, channel, watch, by, text } = kept as LogEntry;
  const name = watch === null ? null : (watches.get(watch)?.name ?? watch);
  return { ...line, kind, at: null, channel, watch, name, by: by ?? '', text, became: '' };
}

function ofWarning(warning: Warning, watches: Watches) {
  const watch = watches.get(warning.watch);
  const word = watch?.switchWord ?? 'switch';
  const { outcome, acknowledgedAt } = warning;
  return {
    kind: 'warning' as const,
    at: warning.at,
    channel: warning.channels[0] ?? null,
    watch: warning.watch,
    name: watch?.name ?? warning.watch,
    by: warning.acknowledgedBy ?? '',
    text: warningText(warning, word),
    became: warningBecame(warning, word),
    waits: outcome === 'open' && acknowledgedAt === null && wasCalled(warning, watch),
    warning,
  };
}

/** Whether a person was called by a warning; older stores do not say, then by what the watch is now. */
const wasCalled = ({ called, quiet }: Warning, watch: ReturnType<Watches['get']>): boolean =>
  called ?? (!quiet && watch?.trigger !== true && watch?.use !== 'on trial');

function ofSwitch(event: SwitchEvent, watches: Watches) {
  const watch = watches.get(event.watch);
  return {
    kind: 'switch' as const,
    at: event.at,
    channel: event.channel,
    watch: event.watch,
    name: watch?.name ?? event.watch,
    by: '',
    text: switchText(event, watch?.switchWord ?? 'switch'),
    became: switchBecame(event),
    switch: event,
  };
}

/** The standards speak of at least 30 days. */
const FIGURES_SECONDS = 30 * 86400;
const MOST_WARNINGS = 50_000;

/** What the figures of the alarm standards are made of. @param now server clock, Unix seconds */
export async function warningTimes(
  store: LogbookStore,
  watches: Watches,
  now: number,
): Promise<WarningTimes> {
  const from = now - FIGURES_SECONDS;
  const [first] = await store.logbook({ from, oldestFirst: true, most: 1 });
  const rows = await store.logbook({ from, kinds: ['warning'], most: MOST_WARNINGS });
  const warnings = rows
    .map(({ json }) => JSON.parse(json) as Warning)
    .filter(({ madeAt }) => madeAt >= from)
    .sort((a, b) => a.madeAt - b.madeAt);
  const names = [...new Set(warnings.map(({ watch }) => watch))];
  const cut = rows.length === MOST_WARNINGS;
  return {
    since: Math.min(now, (cut ? warnings[0]?.madeAt : first?.time) ?? now),
    now,
    watches: names,
    watch: warnings.map(({ watch }) => names.indexOf(watch)),
    madeAt: warnings.map(({ madeAt }) => madeAt),
    called: warnings.map((warning) => wasCalled(warning, watches.get(warning.watch))),
    acknowledgedAt: warnings.map(({ acknowledgedAt }) => acknowledgedAt),
    stood: warnings.map(({ outcome, switchAt, to, at }) =>
      outcome === 'open' ? null : Math.max(0, Math.min(switchAt ?? to, to) - at),
    ),
    cut,
  };
}
