import { decode } from 'cbor-x/decode-no-eval';
import type { ChannelState } from '../../shared-types/channel.ts';
import type { MeasuredDelay } from '../../shared-types/delivery.ts';
import type {
  Condition,
  Mark,
  NewMark,
  PlayState,
  RehearsalRequest,
  RehearsalResult,
  RehearsalState,
  RulePreview,
  StoredCondition,
  SwitchCard,
} from '../../shared-types/rehearsal.ts';
import type { WatchState } from '../../shared-types/watch.ts';
import { readCard, type SentCard } from '../card/readCard.ts';
import type { FetchedColumns } from '../columns.ts';
import { ask, reach, send } from '../requests.ts';
import type { RecordingName } from './text.ts';

const at = (id: string) => `/api/rehearsals/${encodeURIComponent(id)}`;

/** The channels there are. @throws Error with the server's own sentence, as all of these requests */
export const channels = async (): Promise<ChannelState[]> => (await ask('/api/channels')) as ChannelState[];

/** The stored recordings, oldest first. */
export const recordings = async (): Promise<RecordingName[]> =>
  (await ask('/api/recordings')) as RecordingName[];

/** Drawing columns of a channel over a part of a stored recording. */
export async function recordingColumns(
  recording: string,
  channel: string,
  from: number,
  to: number,
  columns: number,
): Promise<FetchedColumns> {
  const query = new URLSearchParams({
    recording: `stored:${recording}`,
    channel,
    from: String(from),
    to: String(to),
    columns: String(Math.round(columns)),
  });
  return (await ask(`/api/recordings/columns?${query}`)) as FetchedColumns;
}

/** What a rule would call a switch in a stored recording. */
export async function preview(
  recording: string,
  channel: string,
  regime: string,
  signal: AbortSignal,
): Promise<RulePreview> {
  const body = { recording: `stored:${recording}`, channel, regime };
  return (await send('/api/rehearsals/preview', body, signal)) as RulePreview;
}

/** A rule to begin with; null: none can be defended. */
export async function proposal(
  recording: string,
  channel: string,
): Promise<{ rule: string; why: string } | null> {
  const body = { recording: `stored:${recording}`, channel };
  return (await send('/api/rehearsals/proposal', body)) as { rule: string; why: string } | null;
}

/** Begins a search. */
export const start = async (request: RehearsalRequest): Promise<RehearsalState> =>
  (await send('/api/rehearsals', request)) as RehearsalState;

/** Searches at work and done. */
export const rehearsals = async (): Promise<RehearsalState[]> =>
  (await ask('/api/rehearsals')) as RehearsalState[];

/** How far a search has come. */
export const rehearsal = async (id: string): Promise<RehearsalState> => (await ask(at(id))) as RehearsalState;

/** Stops a search for good. */
export const stop = async (id: string): Promise<RehearsalState> =>
  (await send(`${at(id)}/stop`, {})) as RehearsalState;

/** What a search found. */
export async function result(id: string): Promise<RehearsalResult> {
  const response = await reach(`${at(id)}/result`, { headers: { accept: 'application/cbor' } });
  return decode(new Uint8Array(await response.arrayBuffer())) as RehearsalResult;
}

/** Drawing columns of the chosen variable over a part of recording `index` of a rehearsal. */
export async function variableColumns(
  id: string,
  index: number,
  from: number,
  to: number,
  columns: number,
): Promise<FetchedColumns> {
  const query = new URLSearchParams({
    recording: String(index),
    from: String(from),
    to: String(to),
    columns: String(Math.round(columns)),
  });
  return (await ask(`${at(id)}/columns?${query}`)) as FetchedColumns;
}

/** The last moments before a switch of a rehearsal, with the threshold of a row. */
export async function card(id: string, index: number, row: number): Promise<SwitchCard> {
  const response = await reach(`${at(id)}/cards/${index}?row=${row}`, {
    headers: { accept: 'application/cbor' },
  });
  return readCard(decode(new Uint8Array(await response.arrayBuffer())) as SentCard);
}

/** Puts a row's threshold into use. */
export const putIntoUse = async (id: string, row: number): Promise<{ watch: string }> =>
  (await send(`${at(id)}/watch`, { row })) as { watch: string };

/** Where the report and the figures of a rehearsal are. */
export const reportAddress = (id: string): string => `${at(id)}/report.html`;
export const figuresAddress = (id: string): string => `${at(id)}/result`;

/** Plays a stored recording into this server as if it were live. */
export const play = async (recording: string, pace: string): Promise<PlayState> =>
  (await send('/api/plays', { recording: `stored:${recording}`, pace })) as PlayState;

/** What is being played. */
export const plays = async (): Promise<PlayState[]> => (await ask('/api/plays')) as PlayState[];

/** Ends a play. */
export const stopPlay = async (id: string): Promise<unknown> =>
  await send(`/api/plays/${encodeURIComponent(id)}/stop`, {});

/** Stretches that must not count. */
export const marks = async (): Promise<Mark[]> => (await ask('/api/marks')) as Mark[];
export const addMark = async (mark: NewMark): Promise<unknown> => await send('/api/marks', mark);
export const removeMark = async (id: number): Promise<unknown> =>
  await ask(`/api/marks/${id}`, { method: 'DELETE' });

/** Conditions on other channels. */
export const conditions = async (): Promise<StoredCondition[]> =>
  (await ask('/api/conditions')) as StoredCondition[];
export const addCondition = async (condition: Condition): Promise<unknown> =>
  await send('/api/conditions', condition);
export const removeCondition = async (id: number): Promise<unknown> =>
  await ask(`/api/conditions/${id}`, { method: 'DELETE' });

/** The delay last measured for a watch of a channel; null: none was. */
export async function measuredDelay(channel: string): Promise<MeasuredDelay | null> {
  const watches = (await ask('/api/watches')) as WatchState[];
  const watch = watches.find(({ channels, use }) => channels[0] === channel && use === 'in use');
  if (watch === undefined) return null;
  return (await ask(`/api/watches/${encodeURIComponent(watch.watch)}/delay`)) as MeasuredDelay | null;
}
