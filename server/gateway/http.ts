import { existsSync } from 'node:fs';
import type { IncomingMessage } from 'node:http';
import { fileURLToPath } from 'node:url';
import { Encoder } from 'cbor-x';
import express, { type NextFunction, type Request, type Response } from 'express';
import { z } from 'zod';
import type { Columns } from '../../shared-types/channel.ts';
import { NewWatch, WatchAction } from '../../shared-types/watch.ts';
import { InputError } from '../signal/inputError.ts';
import { looksLikeTime, parseTime } from '../signal/time.ts';
import type { Hub } from './hub.ts';
import { complaint } from './ingestFrame.ts';
import { samplesAsCsv } from './samplesCsv.ts';
import { Refused } from './watches.ts';

const Use = z.object({ use: z.enum(['in use', 'on trial', 'taken out of use']) });

const CONTENT_SECURITY_POLICY = [
  "default-src 'self'",
  // the chart library sets sizes and colours as inline styles
  "style-src 'self' 'unsafe-inline'",
  "img-src 'self' data:",
  "object-src 'none'",
  "base-uri 'none'",
  "form-action 'self'",
  "frame-ancestors 'none'",
].join('; ');

const MOST_ENTRIES = 10_000;
const LOOPBACK = new Set(['localhost', '127.0.0.1', '[::1]']);
const encoder = new Encoder({ useRecords: false });

/** Where the built pages are, from the source as well as from what was built of it. */
function pagesFolder(): string {
  const built = import.meta.url.endsWith('.js');
  return fileURLToPath(new URL(built ? '../../client/' : '../../dist/client/', import.meta.url));
}

/**
 * Why a request may not come in, or null. A page of another origin must not steer the server through its reader's
 * browser, nor reach it under a name of its own that points to this machine.
 */
export function whyNotAllowed(headers: IncomingMessage['headers']): string | null {
  const host = headers.host ?? '';
  const name = host.replace(/:\d+$/, '');
  if (!LOOPBACK.has(name))
    return `the request names host "${host}"; ask for http://localhost or http://127.0.0.1`;
  const { origin } = headers;
  if (origin !== undefined && origin !== `http://${host}`)
    return `a page of ${origin} may not use this server; open its own page at http://${host}/`;
  return null;
}

function problem(response: Response, status: number, title: string, detail: string, code: string): void {
  response.status(status).type('application/problem+json');
  response.send(JSON.stringify({ type: 'about:blank', title, status, detail, code }));
}

function read<T>(schema: z.ZodType<T>, source: unknown): T {
  const parsed = schema.safeParse(source ?? {});
  if (!parsed.success)
    throw new Refused(400, 'BAD_REQUEST', `the request cannot be used: ${complaint(parsed.error)}`);
  return parsed.data;
}

const text = (value: unknown): string | undefined => (typeof value === 'string' ? value : undefined);

function numberIn(query: Request['query'], name: string, fallback: number): number {
  const given = text(query[name]);
  if (given === undefined || given === '') return fallback;
  const number = looksLikeTime(given) ? parseTime(given) : Number(given);
  if (Number.isFinite(number)) return number;
  throw new Refused(
    400,
    'BAD_QUERY',
    `${name} is "${given.slice(0, 60)}"; give a number or an RFC 3339 time`,
  );
}

const gapsAsNull = (values: Float64Array) =>
  Array.from(values, (value) => (Number.isNaN(value) ? null : value));

function sendColumns(request: Request, response: Response, columns: Columns): void {
  if (request.accepts(['application/json', 'application/cbor']) === 'application/cbor')
    response.type('application/cbor').send(Buffer.from(encoder.encode(columns)));
  else
    response.json({
      t: Array.from(columns.t),
      low: gapsAsNull(columns.low),
      high: gapsAsNull(columns.high),
    });
}

function columnsAsked(query: Request['query'], newest: number | null) {
  const to = numberIn(query, 'to', newest ?? 0);
  const from = numberIn(query, 'from', to - 60);
  const columns = Math.round(numberIn(query, 'columns', 1000));
  if (from >= to) throw new Refused(400, 'BAD_QUERY', `from (${from}) is not before to (${to}); swap them`);
  if (columns < 1 || columns > 20_000)
    throw new Refused(400, 'BAD_QUERY', `columns is ${columns}; ask for 1 to 20000`);
  return { from, to, columns };
}

function routeChannels(app: express.Express, hub: Hub): void {
  const channelOf = (request: Request): string => {
    const channel = String(request.params.channel);
    if (!hub.channels.has(channel))
      throw new Refused(
        404,
        'NO_SUCH_CHANNEL',
        `there is no channel "${channel}"; GET /api/channels lists them`,
      );
    return channel;
  };
  app.get('/api/channels', (_request, response) => {
    response.json(hub.channels.states(hub.now()));
  });
  app.get('/api/channels/:channel/columns', async (request, response) => {
    const channel = channelOf(request);
    const { from, to, columns } = columnsAsked(request.query, hub.channels.newest(channel));
    hub.recorder.flush();
    sendColumns(request, response, await hub.store.signalColumns(channel, from, to, columns));
  });
  app.get('/api/channels/:channel/samples.csv', async (request, response) => {
    const channel = channelOf(request);
    const { first, newest, interval } = hub.channels.state(channel, hub.now());
    const from = numberIn(request.query, 'from', first ?? 0);
    const to = numberIn(request.query, 'to', newest ?? 0);
    hub.recorder.flush();
    response.type('text/csv; charset=utf-8');
    for await (const part of samplesAsCsv(hub.store, channel, from, to, interval)) {
      if (response.destroyed) return;
      if (!response.write(part))
        await new Promise((resolve) => response.once('drain', resolve).once('close', resolve));
    }
    response.end();
  });
}

function routeWatches(app: express.Express, hub: Hub): void {
  const { watches } = hub;
  const watchOf = (request: Request) => String(request.params.watch);
  app.get('/api/watches', (_request, response) => {
    response.json(watches.states());
  });
  app.post('/api/watches', async (request, response) => {
    response.status(201).json(await watches.add(read(NewWatch, request.body)));
  });
  app.post('/api/watches/:watch/actions', (request, response) => {
    response.json(watches.act(watchOf(request), read(WatchAction, request.body)));
  });
  app.post('/api/watches/:watch/use', (request, response) => {
    response.json(watches.setUse(watchOf(request), read(Use, request.body).use));
  });
  app.get('/api/watches/:watch/columns', async (request, response) => {
    const { watch, at } = watches.state(watchOf(request));
    const { from, to, columns } = columnsAsked(request.query, at);
    await watches.saveProgress();
    sendColumns(request, response, await hub.store.traceColumns(watch, from, to, columns));
  });
}

function routeModels(app: express.Express, hub: Hub): void {
  app.get('/api/models', (_request, response) => {
    response.json(hub.watches.models());
  });
  app.post('/api/models', express.text({ type: () => true, limit: '64mb' }), async (request, response) => {
    const name = await hub.watches.addModel(String(request.body ?? ''));
    response.status(201).json({ name });
  });
  app.get('/api/models/:name', (request, response) => {
    const json = hub.watches.modelJson(request.params.name);
    if (json === null)
      throw new Refused(
        404,
        'NO_SUCH_MODEL',
        `there is no model "${request.params.name}"; GET /api/models lists them`,
      );
    response.type('application/json').send(json);
  });
}

function routeRecords(app: express.Express, hub: Hub): void {
  app.get('/api/warnings', async (request, response) => {
    const channel = text(request.query.channel);
    const after = numberIn(request.query, 'after', 0);
    response.json(await hub.store.warnings({ ...(channel ? { channel } : {}), after, most: MOST_ENTRIES }));
  });
  app.get('/api/switches', async (request, response) => {
    const channel = text(request.query.channel);
    const since = numberIn(request.query, 'since', Number.NEGATIVE_INFINITY);
    response.json(
      await hub.store.switches({
        ...(channel ? { channel } : {}),
        ...(since > Number.NEGATIVE_INFINITY ? { since } : {}),
        most: MOST_ENTRIES,
      }),
    );
  });
  app.get('/api/recordings', async (_request, response) => {
    hub.recorder.flush();
    response.json(await hub.store.recordings(hub.settings.recordingGap));
  });
  app.get('/api/log', async (request, response) => {
    const after = text(request.query.after);
    response.json(
      await hub.store.logEntries({
        ...(after === undefined ? { newest: true } : { after: numberIn(request.query, 'after', 0) }),
        most: Math.min(MOST_ENTRIES, Math.max(1, numberIn(request.query, 'most', 1000))),
      }),
    );
  });
}

const FIRST_PAGE_MISSING = 'The pages are not built; run npm run build, then reload.';

function answerError(error: unknown, _request: Request, response: Response, _next: NextFunction): void {
  if (response.headersSent) {
    response.destroy();
    return;
  }
  const { status, type, message } = error as { status?: number; type?: string; message: string };
  if (error instanceof Refused)
    problem(
      response,
      error.status,
      error.status === 404 ? 'Not found' : 'Cannot be done',
      message,
      error.code,
    );
  else if (error instanceof InputError) problem(response, 400, 'Cannot be used', message, error.code);
  else if (type === 'entity.parse.failed')
    problem(
      response,
      400,
      'Not JSON',
      `the body is not JSON: ${message}; send one JSON document`,
      'NOT_JSON',
    );
  else if (type === 'entity.too.large')
    problem(response, 413, 'Too large', 'the body is too large; send a smaller one', 'TOO_LARGE');
  else if (status !== undefined && status >= 400 && status < 500)
    problem(response, status, 'Cannot be used', message, 'BAD_REQUEST');
  else problem(response, 500, 'Failed', message, 'FAILED');
}

/** HTTP: health, what is known, what a person may do, and the pages. Errors are RFC 9457 problem details. */
export function createHttpApp(hub: Hub): express.Express {
  const app = express();
  app.disable('x-powered-by');
  app.use((request, response, next) => {
    response.set('Content-Security-Policy', CONTENT_SECURITY_POLICY);
    response.set('X-Content-Type-Options', 'nosniff');
    response.set('Referrer-Policy', 'no-referrer');
    const reason = whyNotAllowed(request.headers);
    if (reason === null) next();
    else problem(response, 403, 'Not allowed', reason, 'OTHER_ORIGIN');
  });
  app.get('/health', (_request, response) => {
    response.json({ status: 'serving', trouble: hub.trouble() });
  });
  app.use('/api', (_request, response, next) => {
    response.set('Cache-Control', 'no-store');
    next();
  });
  routeModels(app, hub);
  app.use(express.json({ limit: '1mb', type: () => true }));
  routeChannels(app, hub);
  routeWatches(app, hub);
  routeRecords(app, hub);
  const pages = pagesFolder();
  if (existsSync(pages)) app.use(express.static(pages));
  else
    app.get('/', (_request, response) => {
      response.status(503).type('text/plain').send(FIRST_PAGE_MISSING);
    });
  app.use((request: Request, response: Response) => {
    problem(response, 404, 'Not found', `there is nothing at ${request.method} ${request.path}`, 'NOT_FOUND');
  });
  app.use(answerError);
  return app;
}
