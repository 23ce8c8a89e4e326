import { afterEach } from 'vitest';
import { WebSocket } from 'ws';
import { type RunningServer, type ServerOptions, startServer } from '../../../server/gateway/server.ts';
import { modelFromJson, modelToJson } from '../../../server/model/modelFile.ts';
import { openStore } from '../../../server/store/openStore.ts';
import { createWatch } from '../../../server/watch/watch.ts';
import { INGEST_PROTOCOL, type IngestReply } from '../../../shared-types/ingest.ts';
import type { Model } from '../../../shared-types/model.ts';
import { Settings } from '../../../shared-types/settings.ts';

const servers: RunningServer[] = [];
const sockets: WebSocket[] = [];
afterEach(async () => {
  for (const socket of sockets.splice(0)) socket.terminate();
  for (const server of servers.splice(0)) await server.close();
});

/** A real server on a free port over a data folder; closed after the test. */
export async function serve(
  folder: string,
  settings: Partial<Settings> = {},
  more: Partial<ServerOptions> = {},
): Promise<RunningServer> {
  const server = await startServer({
    port: 0,
    listen: '127.0.0.1',
    store: openStore(folder, { commitEvery: 0.01 }),
    settings: Settings.parse(settings),
    demo: false,
    program: 'foreshift test',
    createWatch,
    readModel: modelFromJson,
    warn: () => {},
    ...more,
  });
  servers.push(server);
  return server;
}

export interface Line {
  say(message: object | string | Uint8Array): void;
  replies: IngestReply[];
  /** resolves once a reply passes the test; all replies are looked at, earlier ones too */
  heard(test: (reply: IngestReply) => boolean): Promise<IngestReply>;
  closed: Promise<{ code: number; reason: string }>;
  close(): void;
}

/** A producer's raw connection; ended after the test. */
export async function connect(port: number): Promise<Line> {
  const socket = new WebSocket(`ws://127.0.0.1:${port}/ingest`, INGEST_PROTOCOL);
  sockets.push(socket);
  const replies: IngestReply[] = [];
  let listeners: (() => void)[] = [];
  socket.on('message', (data) => {
    replies.push(JSON.parse(String(data)) as IngestReply);
    for (const listener of listeners) listener();
  });
  const closed = new Promise<{ code: number; reason: string }>((resolve) => {
    socket.on('close', (code, reason) => resolve({ code, reason: String(reason) }));
  });
  socket.on('error', () => {});
  await new Promise((resolve, reject) => socket.once('open', resolve).once('error', reject));
  return {
    say: (message) =>
      socket.send(
        typeof message === 'string' || message instanceof Uint8Array ? message : JSON.stringify(message),
      ),
    replies,
    heard: (test) =>
      new Promise((resolve) => {
        const look = () => {
          const found = replies.find(test);
          if (!found) return;
          listeners = listeners.filter((listener) => listener !== look);
          resolve(found);
        };
        listeners.push(look);
        look();
      }),
    closed,
    close: () => socket.close(),
  };
}

/** GET or POST of the server's API, parsed. */
export async function api<T = Record<string, unknown>[]>(
  port: number,
  path: string,
  body?: unknown,
): Promise<{ status: number; json: T }> {
  const response = await fetch(`http://127.0.0.1:${port}${path}`, {
    ...(body === undefined ? {} : { method: 'POST', body: JSON.stringify(body) }),
  });
  return { status: response.status, json: (await response.json()) as T };
}

/** Waits until something holds; the test's own time limit ends it. */
export async function until(holds: () => boolean | Promise<boolean>): Promise<void> {
  while (!(await holds())) await new Promise((resolve) => setTimeout(resolve, 20));
}

/**
 * A model that warns when channel "c", a swing between -2 and 2, rises through -1: about a second before it changes
 * sides.
 */
export function swingModel(name = 'swing'): Model {
  return {
    name,
    interval: 0.1,
    delays: 3,
    rank: 2,
    channels: [{ channel: 'c', unit: 'V', mean: 0, scale: 1 }],
    center: 'mean',
    coordinates: Float64Array.of(1, 0, 0, 1, 0, 0),
    singularValues: Float64Array.of(2, 1),
    spectrum: Float64Array.of(2, 1, 0.1),
    A: Float64Array.of(0),
    B: Float64Array.of(1),
    diagnostics: {
      r2: Float64Array.of(1),
      forcing: { kurtosis: 0, share: 0 },
      antisymmetryDefect: 0,
      eigenvalues: [{ re: 0, im: 0 }],
      heldOut: null,
      method: 'lagged products (double-double)',
      rankChoice: 'given',
      windowChoice: 'given',
      samples: 100,
      windows: 98,
      seconds: 0.01,
    },
    gapIntervals: 3,
    rule: {
      variable: 'level',
      direction: 'rising',
      threshold: -1,
      rearm: -1.2,
      onDelay: 0,
      holdOff: 0,
      leastLead: 0.5,
      horizon: 3,
    },
    regime: { kind: 'sides', low: -1.5, high: 1.5 },
    regimeChannel: null,
    switchWord: 'swing',
    validity: null,
    score: null,
    provenance: { recordings: [], program: 'foreshift test', fittedAt: '2026-01-01T00:00:00Z' },
  };
}

export const swingModelJson = (): string => modelToJson(swingModel());

/** The swing: sample i at 0.1 i seconds is -2 cos(0.05 i). */
export const swing = (from: number, count: number): Float64Array =>
  Float64Array.from({ length: count }, (_, i) => -2 * Math.cos((from + i) * 0.05));
