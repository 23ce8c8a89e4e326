import type { IncomingMessage, Server } from 'node:http';
import type { Duplex } from 'node:stream';
import { FEED_PROTOCOL } from '../../shared-types/feed.ts';
import { INGEST_PROTOCOL } from '../../shared-types/ingest.ts';
import type { Model } from '../../shared-types/model.ts';
import { Settings } from '../../shared-types/settings.ts';
import type { Store } from '../store/store.ts';
import { type Access, type Identity, openAccess } from './access/access.ts';
import { may } from './access/accessRules.ts';
import { createHostCheck, inUrl } from './access/hostCheck.ts';
import type { Moment } from './channels/channels.ts';
import { createServerClock, machineClock, stepText } from './channels/serverClock.ts';
import type { OpenReceiver } from './delivery/receivers.ts';
import { createHttpApp } from './http/http.ts';
import { routesOf } from './http/httpRoutes.ts';
import { createHttpServer, listening, type Tls } from './http/httpServer.ts';
import { socketServer, takeUpgrade } from './http/upgrades.ts';
import { createHub, type Hub } from './hub.ts';
import { type Log, sparing } from './logLines.ts';
import { createMetrics } from './metrics/metrics.ts';
import { createPlays, type Player } from './rehearsals/plays.ts';
import { createRehearsals } from './rehearsals/rehearsals.ts';
import { goodbye, putOut, servePages, serveProducers, watchLiveness } from './sockets.ts';
import type { Surroundings } from './watches/runningWatch.ts';

export interface ServerOptions {
  /** 0: any free port */
  port: number;
  listen: string;
  store: Store;
  settings?: Settings;
  demo: boolean;
  /** name and version, for the page */
  program: string;
  createWatch: Surroundings['createWatch'];
  readModel(json: string): Model;
  /** told in sentences what a person should know */
  warn(text: string): void;
  /** the built program that plays recordings, and the data folder it reads them from; left out: nothing is played */
  player?: Player;
  clock?: () => Moment;
  /** who may do what; left out: whoever can connect may do everything */
  access?: Access;
  tls?: Tls;
  /** where warnings go besides the pages, as settings.json names them */
  receivers?: readonly OpenReceiver[];
  /** names this server is reached by, beside this machine's own */
  names?: string[];
  /** left out: warnings go to `warn` */
  log?: Log;
}

export interface RunningServer {
  port: number;
  hub: Hub;
  /** where this machine's own producers connect, without TLS */
  ownIngest: string;
  /** what they show there; null: nothing is asked for */
  ownToken: string | null;
  /** every HTTP route, as "GET /api/channels" */
  routes(): string[];
  /** stops taking, commits, acknowledges, saves snapshots, says goodbye with 1001 and closes the store */
  close(): Promise<void>;
}

/** Larger messages end the connection with 1009; frames that are too large are refused in words long before. */
const FRAME_BYTES = 32 * 1024 * 1024;
const SAMPLE_BYTES = 64;
const LARGEST_REQUEST_BYTES = 64 * 1024;
/** connections that are neither producers nor pages */
const OTHER_CONNECTIONS = 256;
/** the same complaint is logged at most so often, seconds */
const SPARING_SECONDS = 10;

const addressOf = (scheme: 'ws' | 'wss', listen: string, port: number): string =>
  `${scheme}://${inUrl(listen)}:${port}/ingest`;

/** Where this server's own producers connect: here, without TLS, whatever else is listened on. */
async function ownAddress(listen: string, port: number, tls: Tls | null, inner: Server): Promise<string> {
  if (tls !== null) return addressOf('ws', '127.0.0.1', await listening(inner, 0, '127.0.0.1'));
  const everywhere = listen === '0.0.0.0' || listen === '::';
  return addressOf('ws', everywhere ? '127.0.0.1' : listen, port);
}

function logHappenings(hub: Hub, log: Log): void {
  const issued = new Set<number>();
  hub.news$.subscribe((message) => {
    if (message.kind === 'log') {
      const { kind, channel, watch, text } = message.entry;
      log({
        level: 'notice',
        event: `logbook: ${kind}`,
        text,
        ...(channel ? { channel } : {}),
        ...(watch ? { watch } : {}),
      });
    }
    if (message.kind === 'warning' && !issued.has(message.warning.id)) {
      const { id, watch, outcome } = message.warning;
      issued.add(id);
      if (issued.size > 10_000) issued.delete(issued.values().next().value!);
      if (outcome === 'open')
        log({ level: 'notice', event: 'warning issued', text: `warning ${id} was issued`, watch });
    }
  });
}

/**
 * Starts the server: HTTP and the two WebSockets on one port, over a store that it closes in the end.
 *
 * @throws the system's error when the port cannot be had; the store is closed then
 */
export async function startServer(options: ServerOptions): Promise<RunningServer> {
  const { store, demo, program, listen } = options;
  const settings = options.settings ?? Settings.parse({});
  const clock = createServerClock(machineClock);
  const now = options.clock ?? clock.now;
  const monotonic = () => now().monotonic;
  const log: Log = options.log ?? (({ level, text }) => level !== 'notice' && options.warn(text));
  const seldom = sparing(log, SPARING_SECONDS, monotonic);
  const access = options.access ?? openAccess();
  const tls = options.tls ?? null;
  const hub = await createHub({
    store,
    settings,
    now,
    createWatch: options.createWatch,
    readModel: options.readModel,
    warn: options.warn,
    log: seldom,
    receivers: options.receivers ?? [],
  });
  const note = (text: string) =>
    hub.journal.log({ kind: 'server', channel: null, watch: null, by: null, text });
  logHappenings(hub, log);
  for (const notice of store.notices ?? []) {
    options.warn(notice);
    note(notice);
  }
  const rehearsals = await createRehearsals({
    store,
    journal: hub.journal,
    gap: settings.recordingGap,
    program,
    serverTime: () => now().server,
    leftOutVersion: hub.leftOut.version,
    flushFrames: hub.recorder.flush,
    failed: options.warn,
  });
  let ownIngest = '';
  const plays = createPlays({
    player: options.player ?? null,
    journal: hub.journal,
    channels: hub.channels,
    ingest: () => ownIngest,
    token: access.ownToken,
  });
  const startedAt = now().server;
  const ingest = socketServer(INGEST_PROTOCOL, FRAME_BYTES + SAMPLE_BYTES * settings.largestFrame);
  const feed = socketServer(FEED_PROTOCOL, LARGEST_REQUEST_BYTES);
  const sockets = [ingest, feed];
  const metrics = createMetrics(hub, {
    program,
    startedAt,
    producers: () => ingest.clients.size,
    pages: () => feed.clients.size,
  });
  const check = createHostCheck(listen, options.names ?? []);
  const app = createHttpApp(hub, { rehearsals, plays, access, check, log, metrics: metrics.text });
  const most = settings.mostProducers + settings.mostPages + OTHER_CONNECTIONS;
  const http = createHttpServer(app, tls, most);
  const inner = createHttpServer(app, null, most);
  const doors = {
    '/ingest': {
      sockets: ingest,
      lets: ({ role }: Identity) => role === 'everything' || role === 'producer',
      others: 'is no producer’s; create one of role producer for what feeds channels',
      most: settings.mostProducers,
    },
    '/feed': {
      sockets: feed,
      lets: (identity: Identity) => may(identity, 'viewer'),
      others: 'is a producer’s: it feeds channels and reads nothing',
      most: settings.mostPages,
    },
  };
  for (const each of [http, inner])
    each.on('upgrade', (request: IncomingMessage, socket: Duplex, head: Buffer) =>
      takeUpgrade(request, socket, head, { check, access, doors, log: seldom }),
    );
  const takeNoMore = serveProducers(hub, ingest, { log: seldom, monotonic });
  let port = 0;
  try {
    port = await listening(http, options.port, listen);
    ownIngest = await ownAddress(listen, port, tls, inner);
  } catch (error) {
    http.close();
    await store.close();
    throw error;
  }
  const ingestAddress = addressOf(tls === null ? 'ws' : 'wss', options.names?.[0] ?? listen, port);
  servePages(hub, feed, { program, startedAt, demo, ingestAddress }, { log, monotonic });
  const ticking = setInterval(() => {
    hub.tick();
    metrics.tick();
    putOut(sockets);
    const step = options.clock ? null : clock.check();
    if (step === null) return;
    if (step.taken) hub.clockStepped(step.seconds);
    log({ level: 'warning', event: 'clock set', text: stepText(step), seconds: step.seconds });
    note(stepText(step));
  }, 1000);
  const liveness = watchLiveness(sockets);
  note(`${program} started`);

  let closing: Promise<void> | null = null;
  const shutDown = async () => {
    clearInterval(ticking);
    clearInterval(liveness);
    http.close();
    inner.close();
    await Promise.all([plays.close(), rehearsals.close()]);
    takeNoMore();
    note(`${program} stopped`);
    metrics.close();
    await hub.close();
    for (const socket of ingest.clients) socket.resume();
    await goodbye(sockets);
    http.closeAllConnections();
    inner.closeAllConnections();
    await store.close();
  };
  return {
    port,
    hub,
    ownIngest,
    ownToken: access.ownToken,
    routes: () => routesOf(app),
    close: () => (closing ??= shutDown()),
  };
}
