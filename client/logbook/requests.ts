import type { ChannelState } from '../../shared-types/channel.ts';
import type { LogbookPage, NewNote, WarningTimes } from '../../shared-types/logbook.ts';
import type { SwitchCard } from '../../shared-types/rehearsal.ts';
import type { WatchState } from '../../shared-types/watch.ts';
import { readCard, type SentCard } from '../card/readCard.ts';
import { ask, send } from '../requests.ts';

/** Lines a page asks for at a time. */
export const PAGE_LINES = 200;

/** One page of lines. @param before `next` of the page above it; null: the newest. @throws Error with a sentence */
export async function pageOf(filter: URLSearchParams, before: string | null): Promise<LogbookPage> {
  const query = new URLSearchParams(filter);
  query.set('most', String(PAGE_LINES));
  if (before !== null) query.set('before', before);
  return pageIn(await ask(`/api/logbook?${query}`));
}

/** Those of some lines that a filter lets through. @throws Error with a sentence */
export async function linesOf(filter: URLSearchParams, keys: readonly string[]): Promise<LogbookPage> {
  const query = new URLSearchParams(filter);
  query.set('most', '1000');
  for (const key of keys) query.append('key', key);
  return pageIn(await ask(`/api/logbook?${query}`));
}

function pageIn(answer: unknown): LogbookPage {
  if (Array.isArray((answer as LogbookPage | null)?.entries)) return answer as LogbookPage;
  throw new Error('The server’s answer is no page of the logbook; reload this page, or restart the server.');
}

/** What the figures are made of. @throws Error with a sentence */
export async function warningTimes(): Promise<WarningTimes> {
  return (await ask('/api/logbook/warnings')) as WarningTimes;
}

/** Channels and watches, for the filter and the figures. @throws Error with a sentence */
export async function surroundings(): Promise<{ channels: ChannelState[]; watches: WatchState[] }> {
  const [channels, watches] = await Promise.all([ask('/api/channels'), ask('/api/watches')]);
  return { channels: channels as ChannelState[], watches: watches as WatchState[] };
}

/** Writes a note; it is on disk when this resolves. @throws Error with a sentence */
export async function addNote(note: NewNote): Promise<void> {
  await send('/api/notes', note);
}

/** The card of a switch. @throws Error with a sentence */
export async function cardOf(id: number): Promise<SwitchCard> {
  return readCard((await ask(`/api/switches/${id}/card`)) as SentCard);
}
