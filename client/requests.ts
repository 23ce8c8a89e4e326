import type { LogbookPage } from '../shared-types/logbook.ts';
import type { ModelSummary } from '../shared-types/model.ts';
import type { ActedOn, SwitchEvent, Warning } from '../shared-types/warning.ts';
import type { NewWatchToSend, WatchAction } from '../shared-types/watch.ts';
import type { FetchedColumns } from './columns.ts';

/** An action as the page sends it; the server fills what is left out. */
export type ActionToSend = WatchAction extends infer A
  ? A extends { by: string }
    ? Omit<A, 'by'> & { by: string }
    : never
  : never;

/** Does something to a watch. @throws Error with the server's own sentence */
export async function act(watch: string, action: ActionToSend): Promise<void> {
  await send(`/api/watches/${encodeURIComponent(watch)}/actions`, action);
}

/** Says that a warning was acted on, or takes it back. @throws Error with the server's own sentence */
export async function sayActedOn(warning: number, said: ActedOn): Promise<void> {
  await send(`/api/warnings/${warning}/acted`, said);
}

/** Puts a model on channels. @throws Error with the server's own sentence */
export async function startWatch(watch: NewWatchToSend): Promise<void> {
  await send('/api/watches', watch);
}

/** The models there are. @throws Error with the server's own sentence */
export async function models(): Promise<ModelSummary[]> {
  const listed: unknown = await ask('/api/models');
  if (Array.isArray(listed)) return listed as ModelSummary[];
  const inside = (listed as { models?: unknown }).models;
  return Array.isArray(inside) ? (inside as ModelSummary[]) : [];
}

/** Drawing columns of a channel's signal or a watch's trace between two times. @throws Error with the server's own sentence */
export async function columnsOf(
  of: { kind: 'channels' | 'watches'; name: string },
  from: number,
  to: number,
  columns: number,
): Promise<FetchedColumns> {
  const query = new URLSearchParams({
    from: String(from),
    to: String(to),
    columns: String(Math.round(columns)),
  });
  return (await ask(`/api/${of.kind}/${encodeURIComponent(of.name)}/columns?${query}`)) as FetchedColumns;
}

/**
 * Warnings and switches of a channel between two times (s), from the newest thousand of its lines.
 *
 * @throws Error with the server's own sentence
 */
export async function eventsBetween(
  channel: string,
  from: number,
  to: number,
): Promise<{ warnings: Warning[]; switches: SwitchEvent[] }> {
  const query = new URLSearchParams({ channel, most: '1000' });
  query.append('kind', 'warning');
  query.append('kind', 'switch');
  // lines of elapsed time (below 1e8) are kept under the server's clock
  if (from >= 1e8) {
    query.set('from', String(from));
    query.set('to', String(to));
  }
  const { entries } = (await ask(`/api/logbook?${query}`)) as LogbookPage;
  const within = entries.filter(({ at }) => at !== null && at >= from && at <= to);
  return {
    warnings: within.flatMap(({ warning }) => warning ?? []),
    switches: within.flatMap((entry) => entry.switch ?? []),
  };
}

/** Posts JSON; the answer's JSON. @throws Error with the server's own sentence */
export async function send(address: string, body: unknown, signal?: AbortSignal): Promise<unknown> {
  return await ask(address, {
    method: 'POST',
    headers: { 'content-type': 'application/json' },
    body: JSON.stringify(body),
    ...(signal === undefined ? {} : { signal }),
  });
}

/** Asks the server; the answer's JSON. @throws Error with the server's own sentence */
export async function ask(address: string, init?: RequestInit): Promise<unknown> {
  const response = await reach(address, init);
  return await response.json().catch(() => null);
}

/** Asks the server; a good answer. @throws Error with the server's own sentence; an AbortError if the request was called off */
export async function reach(address: string, init?: RequestInit): Promise<Response> {
  let response: Response;
  try {
    response = await fetch(address, init);
  } catch (error) {
    if (error instanceof DOMException && error.name === 'AbortError') throw error;
    throw new Error('Foreshift’s server cannot be reached: nothing was changed; try again once it answers.');
  }
  if (response.ok) return response;
  const body: unknown = await response.json().catch(() => null);
  const detail = (body as { detail?: unknown } | null)?.detail;
  throw new Error(
    typeof detail === 'string' ? detail : `The server answered ${response.status} ${response.statusText}.`,
  );
}
