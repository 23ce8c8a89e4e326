import { Encoder } from 'cbor-x';
import { interval, type Subscription } from 'rxjs';
import { z } from 'zod';
import { TrialSeen } from '../../../shared-types/delivery.ts';
import type { FeedMessage, Welcome } from '../../../shared-types/feed.ts';
import type { Warning } from '../../../shared-types/warning.ts';
import type { Hub } from '../hub.ts';
import { changedKeys } from './changedKeys.ts';
import { createLiveColumns, type LiveColumns } from './liveColumns.ts';

/** A page's connection without its socket. */
export interface FeedLink {
  send(message: Uint8Array, written?: () => void): void;
  /** bytes not yet on the wire */
  waiting(): number;
  close(code: number, reason: string): void;
}

/** What a welcome says besides the hub's own state. */
export interface FeedFacts {
  program: string;
  startedAt: number;
  demo: boolean;
  ingestAddress: string;
}

export interface FeedSession {
  request(text: string): void;
  end(): void;
}

const Look = z.object({
  look: z.object({ seconds: z.number().positive().max(1e8), columns: z.number().int().min(1).max(20_000) }),
});

/** Drawing data are gathered for so long, states for so long (milliseconds). */
export const DRAWING_MILLISECONDS = 100;
export const STATE_MILLISECONDS = 200;
/**
 * The written choice for a slow page: beyond the first limit drawing data are dropped and states wait (the newest of
 * each is sent later); below the second limit what was dropped is sent again from the store; warnings, switches and
 * log lines are always sent, and a page with more than the third limit waiting is hung up on: it connects again and
 * is welcomed with everything.
 */
export const DROP_DRAWING_BYTES = 1_000_000;
export const HEAL_BYTES = 200_000;
export const HANG_UP_BYTES = 64_000_000;
const TRY_AGAIN_LATER = 1013;

const WELCOME_WARNINGS = 200;
const WELCOME_SWITCHES = 2000;
const WELCOME_SECONDS = 3600;

const encoder = new Encoder({ useRecords: false });

/** One line a page draws: a channel's signal or a watch's trace. */
interface Series {
  kind: 'signal' | 'trace';
  name: string;
  live: LiveColumns;
  /** what is drawn so far is being read from the store */
  loading: boolean;
}

async function welcomeOf(hub: Hub, facts: FeedFacts): Promise<Welcome> {
  const watches = hub.watches.states();
  const switches = await Promise.all(
    watches.map(({ watch, channels }) =>
      hub.store.switches({
        watch,
        since: (hub.channels.newest(channels[0]!) ?? 0) - WELCOME_SECONDS,
        most: WELCOME_SWITCHES,
      }),
    ),
  );
  const warnings = await hub.store.warnings({ newest: true, most: WELCOME_WARNINGS });
  const delays = await Promise.all(watches.map(({ watch }) => hub.store.delay(watch)));
  const moment = hub.now();
  return {
    ...facts,
    serverTime: moment.server,
    trouble: hub.trouble(),
    channels: hub.channels.states(moment),
    watches: hub.watches.states(),
    warnings,
    delays: delays.filter((delay) => delay !== null),
    switches: switches
      .flat()
      .sort((a, b) => a.at - b.at)
      .slice(-WELCOME_SWITCHES),
  };
}

/**
 * One page's feed: a welcome, then what changes, and the drawing data for the look it asks for: the past from the
 * store's pyramid, then live columns on the page's own raster. Nothing here can hold ingest up.
 */
export function createFeedSession(hub: Hub, link: FeedLink, facts: FeedFacts): FeedSession {
  const series = new Map<string, Series>();
  const stale = new Set<string>();
  const lateStates = new Set<string>();
  let look: { seconds: number; columns: number } | null = null;
  let early: FeedMessage[] | null = [];
  let ended = false;

  const deliver = (warnings: Warning[]) => {
    for (const { watch, id, deliveredAt } of warnings)
      if (deliveredAt === null) hub.watches.delivered(watch, id);
  };
  const send = (message: FeedMessage) => {
    if (ended) return;
    const bytes = encoder.encode(message);
    if (message.kind === 'warning') link.send(bytes, () => deliver([message.warning]));
    else if (message.kind === 'welcome') link.send(bytes, () => deliver(message.welcome.warnings));
    else link.send(bytes);
    if (message.kind === 'trial') hub.trials.told(message.trial.id);
    if (link.waiting() > HANG_UP_BYTES)
      link.close(TRY_AGAIN_LATER, 'this page reads too slowly; connect again');
  };
  const tell = (message: FeedMessage) => {
    if (early) early.push(message);
    else send(message);
  };

  const sendStates = (keys: Iterable<string>) => {
    for (const key of keys) lateStates.add(key);
    if (early || link.waiting() > DROP_DRAWING_BYTES) return;
    const moment = hub.now();
    for (const key of lateStates) {
      const [kind, name] = [key.slice(0, key.indexOf(' ')), key.slice(key.indexOf(' ') + 1)];
      if (kind === 'channel' && hub.channels.has(name))
        send({ kind: 'channel', channel: hub.channels.state(name, moment) });
      if (kind === 'watch' && hub.watches.has(name)) send({ kind: 'watch', watch: hub.watches.state(name) });
    }
    lateStates.clear();
  };

  const intervalOf = (kind: Series['kind'], name: string): number | null => {
    if (kind === 'signal') return hub.channels.interval(name);
    return hub.watches.has(name) ? hub.watches.state(name).interval : null;
  };
  const newestOf = (kind: Series['kind'], name: string): number | null => {
    if (kind === 'signal') return hub.channels.newest(name);
    return hub.watches.has(name) ? hub.watches.state(name).at : null;
  };

  const draw = (
    kind: Series['kind'],
    name: string,
    columns: NonNullable<ReturnType<LiveColumns['take']>>,
    replace: boolean,
  ) => {
    if (kind === 'trace') return send({ kind, watch: name, columns, replace });
    const moment = hub.now();
    const { newest, age } = hub.channels.state(name, moment);
    send({ kind, channel: name, columns, replace, newest: newest ?? 0, age: age ?? 0 });
  };

  const load = async (kind: Series['kind'], name: string) => {
    if (!look) return;
    const { seconds, columns } = look;
    const step = intervalOf(kind, name);
    const width = step !== null && step >= seconds / columns ? 0 : seconds / columns;
    const key = `${kind} ${name}`;
    const started: Series = { kind, name, live: createLiveColumns(width, step), loading: true };
    series.set(key, started);
    stale.delete(key);
    const to = newestOf(kind, name);
    try {
      // What has passed here is handed to the store first: its answer then ends exactly where the live data begin.
      if (kind === 'signal') hub.recorder.flush();
      else await hub.watches.saveProgress();
      const past =
        to === null
          ? { t: new Float64Array(), low: new Float64Array(), high: new Float64Array() }
          : kind === 'signal'
            ? await hub.store.signalColumns(name, to - seconds, to, columns)
            : await hub.store.traceColumns(name, to - seconds, to, columns);
      if (ended || series.get(key) !== started) return;
      draw(kind, name, past, true);
    } catch {
      stale.add(key);
    }
    started.loading = false;
  };

  const addLive = (kind: Series['kind'], name: string, add: (live: LiveColumns) => void) => {
    if (!look) return;
    const known = series.get(`${kind} ${name}`);
    // A line not drawn yet begins with its past, which holds these samples already.
    if (!known) void load(kind, name);
    else if (!stale.has(`${kind} ${name}`)) add(known.live);
  };

  const sendDrawing = () => {
    const slow = link.waiting() > DROP_DRAWING_BYTES;
    if (!slow && link.waiting() < HEAL_BYTES)
      for (const key of stale) {
        const lost = series.get(key)!;
        if (!lost.loading) void load(lost.kind, lost.name);
      }
    for (const [key, { kind, name, live, loading }] of series) {
      if (loading || stale.has(key)) continue;
      const columns = live.take();
      if (!columns) continue;
      if (slow) stale.add(key);
      else draw(kind, name, columns, false);
    }
  };

  const subscriptions: Subscription[] = [
    hub.news$.subscribe(tell),
    hub.touched$.pipe(changedKeys(STATE_MILLISECONDS)).subscribe(sendStates),
    hub.frames$.subscribe(({ channel, times, t0, dt, values }) =>
      addLive('signal', channel, (live) => live.add(times, t0, dt, values)),
    ),
    hub.traces$.subscribe(({ watch, times, values }) =>
      addLive('trace', watch, (live) => live.add(times, 0, 0, values)),
    ),
    interval(DRAWING_MILLISECONDS).subscribe(() => {
      if (lateStates.size > 0) sendStates([]);
      sendDrawing();
    }),
    interval(1000).subscribe(() => send({ kind: 'beat', serverTime: hub.now().server })),
  ];

  welcomeOf(hub, facts).then(
    (welcome) => {
      send({ kind: 'welcome', welcome });
      const waiting = early ?? [];
      early = null;
      for (const message of waiting) send(message);
    },
    (error: Error) =>
      link.close(TRY_AGAIN_LATER, `the store does not answer: ${error.message}`.slice(0, 100)),
  );

  return {
    request(text) {
      let parsed: unknown;
      try {
        parsed = JSON.parse(text);
      } catch {
        parsed = null;
      }
      const seen = TrialSeen.safeParse(parsed);
      if (seen.success) {
        hub.trials.seen(seen.data);
        return;
      }
      const asked = Look.safeParse(parsed);
      if (!asked.success) {
        link.close(1008, 'a page may only send {"look": {"seconds", "columns"}}');
        return;
      }
      look = asked.data.look;
      series.clear();
      stale.clear();
      for (const name of hub.channels.names()) void load('signal', name);
      for (const { watch } of hub.watches.states()) void load('trace', watch);
    },
    end() {
      ended = true;
      for (const subscription of subscriptions) subscription.unsubscribe();
    },
  };
}
