import { existsSync } from 'node:fs';
import { fileURLToPath } from 'node:url';
import express, { type Request } from 'express';
import { z } from 'zod';
import type { ModelEvidence } from '../../../shared-types/model.ts';
import { ActedOn } from '../../../shared-types/warning.ts';
import { NewWatch, WatchAction } from '../../../shared-types/watch.ts';
import { evidenceOf } from '../../model/evidence.ts';
import type { Access, Identity } from '../access/access.ts';
import { may } from '../access/accessRules.ts';
import type { HostCheck } from '../access/hostCheck.ts';
import type { Hub } from '../hub.ts';
import type { Log } from '../logLines.ts';
import { OPEN_METRICS_TYPE } from '../metrics/openMetrics.ts';
import { Refused } from '../refused.ts';
import type { Plays } from '../rehearsals/plays.ts';
import type { Rehearsals } from '../rehearsals/rehearsals.ts';
import { gate, nameTheDoer, routeAccess } from './httpAccess.ts';
import {
  answerErrors,
  columnsAsked,
  numberIn,
  numberOf,
  problem,
  read,
  sendEither,
  text,
} from './httpAnswers.ts';
import { routeDeliveries } from './httpDeliveries.ts';
import { keepNothing, setHeaders } from './httpHeaders.ts';
import { routeLogbook } from './httpLogbook.ts';
import { routeMarks } from './httpMarks.ts';
import { routePlays } from './httpPlays.ts';
import { routeRecordingColumns, routeRehearsals } from './httpRehearsals.ts';
import { answerNothing, onlyJson, wantsUpgrade } from './httpRoutes.ts';
import { samplesAsCsv } from './samplesCsv.ts';

const Use = z.object({ use: z.enum(['in use', 'on trial', 'taken out of use']) });

const MOST_ENTRIES = 10_000;

/** Where the built pages are, from the source as well as from what was built of it. */
function pagesFolder(): string {
  const built = import.meta.url.endsWith('.js');
  return fileURLToPath(new URL(built ? '../../../client/' : '../../../dist/client/', import.meta.url));
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
    sendEither(request, response, await hub.store.signalColumns(channel, from, to, columns));
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
    sendEither(request, response, await hub.store.traceColumns(watch, from, to, columns));
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
  const known = <T>(name: string, found: T | null): T => {
    if (found !== null) return found;
    throw new Refused(404, 'NO_SUCH_MODEL', `there is no model "${name}"; GET /api/models lists them`);
  };
  app.get('/api/models/:name', ({ params: { name } }, response) => {
    response.type('application/json').send(known(name, hub.watches.modelJson(name)));
  });
  app.get('/api/models/:name/evidence', ({ params: { name } }, response) => {
    const evidence = evidenceOf(known(name, hub.watches.model(name)));
    const usedBy = hub.watches.models().find((model) => model.name === name)?.usedBy ?? [];
    response.json({ ...evidence, name, usedBy } satisfies ModelEvidence);
  });
}

function routeRecords(app: express.Express, hub: Hub): void {
  app.get('/api/warnings', async (request, response) => {
    const channel = text(request.query.channel);
    const after = numberIn(request.query, 'after', 0);
    response.json(await hub.store.warnings({ ...(channel ? { channel } : {}), after, most: MOST_ENTRIES }));
  });
  app.post('/api/warnings/:id/acted', (request, response) => {
    response.json(hub.watches.actOn(numberOf(request, 'id'), read(ActedOn, request.body)));
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

/** What the routes work on, and who may use them. */
export interface HttpNeeds {
  rehearsals: Rehearsals;
  plays: Plays;
  access: Access;
  check: HostCheck;
  log: Log;
  /** OpenMetrics text */
  metrics(): string;
}

function routeServer(app: express.Express, hub: Hub, { access, log, metrics }: HttpNeeds): void {
  app.get('/health', (_request, response) => {
    const { identity } = response.locals as { identity: Identity | null };
    // what the trouble is concerns who may look
    response.json({ status: 'serving', ...(may(identity, 'viewer') ? { trouble: hub.trouble() } : {}) });
  });
  app.get('/metrics', (_request, response) => {
    response.set('Content-Type', OPEN_METRICS_TYPE).send(Buffer.from(metrics()));
  });
  routeAccess(app, access, log);
  for (const path of ['/ingest', '/feed']) app.get(path, wantsUpgrade);
  app.get('/', (_request, response) => problem(response, 503, FIRST_PAGE_MISSING, 'NOT_BUILT'));
}

/** The pages' files; anyone may have them, there is nothing in them but the program. */
function servePages(app: express.Express): void {
  const pages = pagesFolder();
  if (existsSync(pages)) app.use(express.static(pages, { dotfiles: 'ignore', redirect: false }));
}

/** HTTP: health, what is known, what a person may do, and the pages. Errors are RFC 9457 problem details. */
export function createHttpApp(hub: Hub, needs: HttpNeeds): express.Express {
  const app = express();
  app.disable('x-powered-by');
  app.use(setHeaders);
  app.use((request, response, next) => {
    const reason = needs.check(request.headers);
    if (reason === null) next();
    else problem(response, 403, reason, 'OTHER_ORIGIN');
  });
  servePages(app);
  app.use(keepNothing, gate(needs.access, needs.log), onlyJson);
  routeModels(app, hub);
  app.use(express.json({ limit: '1mb', type: () => true }), nameTheDoer);
  routeServer(app, hub, needs);
  routeChannels(app, hub);
  routeWatches(app, hub);
  routeRecords(app, hub);
  routeMarks(app, hub.leftOut);
  routeLogbook(app, hub);
  routeRecordingColumns(app, hub);
  routeRehearsals(app, hub, needs.rehearsals);
  routePlays(app, needs.plays);
  routeDeliveries(app, hub);
  app.use(answerNothing(app));
  app.use(answerErrors(needs.log));
  return app;
}
