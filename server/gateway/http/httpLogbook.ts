import type express from 'express';
import type { Request, Response } from 'express';
import { z } from 'zod';
import { NewNote } from '../../../shared-types/logbook.ts';
import type { Hub } from '../hub.ts';
import {
  byId,
  type LogbookWish,
  logbookPage,
  logbookParts,
  placeOf,
  warningTimes,
} from '../logbook/logbook.ts';
import { LOGBOOK_HEADER, logbookRecord } from '../logbook/logbookCsv.ts';
import { Refused } from '../refused.ts';
import { switchCard } from '../rehearsals/switchCard.ts';
import { numberIn, numberOf, read, sendEither, text } from './httpAnswers.ts';

const several = z
  .union([z.string(), z.array(z.string())])
  .transform((given) => (typeof given === 'string' ? [given] : given))
  .optional();
const Lists = z.object({ kind: several, key: several });
const MOST_KEYS = 500;
const KEY = /^(log|switch|warning) \d{1,15}$/;
const MOST_LINES = 1000;

/** The logbook: its lines by filter, whole as CSV or JSON, notes, the figures, and the card of a switch. */
export function routeLogbook(app: express.Express, hub: Hub): void {
  const watches = () => byId(hub.watches.states());
  app.get('/api/logbook', async (request, response) => {
    const before = text(request.query.before) ?? null;
    if (before !== null && placeOf(before) === null)
      throw new Refused(400, 'BAD_QUERY', `before is "${before.slice(0, 60)}"; give the next of a page`);
    const most = Math.min(MOST_LINES, Math.max(1, Math.round(numberIn(request.query, 'most', 200))));
    response.json(await logbookPage(hub.store, watches(), wishOf(request.query), before, most));
  });
  app.get('/api/logbook/warnings', async (_request, response) => {
    response.json(await warningTimes(hub.store, watches(), hub.now().server));
  });
  app.get('/api/log.csv', async (request, response) => {
    const parts = logbookParts(hub.store, watches(), wishOf(request.query));
    response.type('text/csv; charset=utf-8; header=present').attachment('foreshift-logbook.csv');
    await pour(response, [LOGBOOK_HEADER], parts, (entries) => entries.map(logbookRecord).join(''), '');
  });
  app.get('/api/log.json', async (request, response) => {
    const parts = logbookParts(hub.store, watches(), wishOf(request.query));
    let separator = '';
    response.type('application/json').attachment('foreshift-logbook.json');
    await pour(
      response,
      ['[\n'],
      parts,
      (entries) =>
        entries
          .map((entry) => {
            const line = separator + JSON.stringify(entry);
            separator = ',\n';
            return line;
          })
          .join(''),
      '\n]\n',
    );
  });
  app.post('/api/notes', async (request, response) => {
    const { channel, text: words, by } = read(NewNote, request.body);
    if (channel !== null && !hub.channels.has(channel))
      throw new Refused(
        404,
        'NO_SUCH_CHANNEL',
        `there is no channel "${channel}"; GET /api/channels lists them`,
      );
    const note = { time: hub.now().server, kind: 'note' as const, channel, watch: null, by, text: words };
    const entry = { ...note, id: await hub.store.log(note) };
    hub.news$.next({ kind: 'log', entry });
    response.status(201).json(entry);
  });
  app.get('/api/switches/:id/card', async (request, response) => {
    sendEither(request, response, await switchCard(hub, numberOf(request, 'id')));
  });
}

function wishOf(query: Request['query']): LogbookWish {
  const { kind, key } = read(Lists, query);
  const wish: LogbookWish = {};
  if (kind !== undefined) wish.kinds = kind;
  if (key !== undefined) {
    const strange = key.find((each) => !KEY.test(each));
    if (strange !== undefined || key.length > MOST_KEYS)
      throw new Refused(
        400,
        'BAD_QUERY',
        strange === undefined
          ? `${key.length} keys are asked for; ask for ${MOST_KEYS} at most`
          : `key is "${strange.slice(0, 60)}"; give keys of lines, like "warning 12"`,
      );
    wish.keys = key;
  }
  for (const name of ['channel', 'watch', 'text'] as const) {
    const given = text(query[name]);
    if (given !== undefined && given !== '') wish[name] = given;
  }
  for (const name of ['from', 'to'] as const) {
    if (text(query[name])) wish[name] = numberIn(query, name, 0);
  }
  if (wish.from !== undefined && wish.to !== undefined && wish.from > wish.to)
    throw new Refused(400, 'BAD_QUERY', `from (${wish.from}) is after to (${wish.to}); swap them`);
  return wish;
}

/** Writes an answer a part at a time, no faster than it is taken, and stops when nobody takes it any more. */
async function pour<P>(
  response: Response,
  before: string[],
  parts: AsyncGenerator<P>,
  textOf: (part: P) => string,
  after: string,
): Promise<void> {
  const write = async (piece: string) => {
    if (piece !== '' && !response.destroyed && !response.write(piece))
      await new Promise((resolve) => response.once('drain', resolve).once('close', resolve));
  };
  for (const piece of before) await write(piece);
  for await (const part of parts) {
    if (response.destroyed) return;
    await write(textOf(part));
  }
  response.end(after);
}
