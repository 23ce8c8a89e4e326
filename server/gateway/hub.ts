import { Subject } from 'rxjs';
import type { FeedMessage } from '../../shared-types/feed.ts';
import type { Hello, IngestErrorCode } from '../../shared-types/ingest.ts';
import type { Model } from '../../shared-types/model.ts';
import type { Settings } from '../../shared-types/settings.ts';
import type { FrameToStore, Store } from '../store/store.ts';
import { createChannelClocks } from './channels/channelClocks.ts';
import { type Channels, createChannels, type Moment } from './channels/channels.ts';
import { type Counts, createCounts } from './counts.ts';
import { createDeliveries, type Deliveries } from './delivery/delivery.ts';
import type { OpenReceiver } from './delivery/receivers.ts';
import { createTrials, type TrialProducer, type Trials } from './delivery/trials.ts';
import {
  createIngestSession,
  type IngestDoors,
  type IngestSession,
  type Refusal,
} from './ingest/ingestSession.ts';
import { createRecorder, type Recorder } from './ingest/recorder.ts';
import { createJournal, type Journal } from './journal.ts';
import type { Log } from './logLines.ts';
import { createKeeping } from './watches/keeping.ts';
import { createLeftOut, type LeftOutRegistry } from './watches/leftOut.ts';
import type { Surroundings } from './watches/runningWatch.ts';
import { createWatches, type Watches } from './watches/watches.ts';

/** New steps of a watch's variable. */
export interface TracedSteps {
  watch: string;
  times: Float64Array;
  values: Float64Array;
}

/** Everything behind the sockets. The streams carry frames and happenings, never single samples. */
export interface Hub {
  channels: Channels;
  watches: Watches;
  /** marks and conditions */
  leftOut: LeftOutRegistry;
  journal: Journal;
  deliveries: Deliveries;
  trials: Trials;
  recorder: Recorder;
  store: Store;
  settings: Settings;
  now(): Moment;
  /** a producer's connection; `close` ends its socket, `feeds` says which channels its token is for, `roundTrip` pings it */
  producer(
    reply: IngestDoors['reply'],
    close: IngestDoors['close'],
    feeds?: (channel: string) => boolean,
    roundTrip?: TrialProducer['roundTrip'],
  ): IngestSession;
  counts: Counts;
  frames$: Subject<FrameToStore>;
  traces$: Subject<TracedSteps>;
  /** to be sent to every page at once */
  news$: Subject<FeedMessage>;
  /** key of a channel or watch whose state changed: `channel NAME` or `watch ID` */
  touched$: Subject<string>;
  trouble(): string | null;
  /** once a second */
  tick(): void;
  /** the server's clock was set forwards by so many seconds */
  clockStepped(seconds: number): void;
  /** resolves once everything taken is settled and written */
  close(): Promise<void>;
}

export interface HubNeeds {
  store: Store;
  settings: Settings;
  now(): Moment;
  createWatch: Surroundings['createWatch'];
  readModel(json: string): Model;
  warn(text: string): void;
  log?: Log;
  /** where warnings go besides the pages */
  receivers?: readonly OpenReceiver[];
}

/** A producer's hold on a channel. */
interface Holder {
  run: string | null;
  session: IngestSession;
  close: IngestDoors['close'];
  trial: TrialProducer;
  feeds(channel: string): boolean;
}

const TAKEN_OVER = 4001;

/** Makes the hub, loads what is stored and lets the watches catch up. */
export async function createHub(needs: HubNeeds): Promise<Hub> {
  const { store, settings, now } = needs;
  const channels = createChannels();
  const counts = createCounts();
  const log: Log = needs.log ?? (() => {});
  const newsOfClocks = createChannelClocks(settings.clockTolerance);
  const frames$ = new Subject<FrameToStore>();
  const traces$ = new Subject<TracedSteps>();
  const news$ = new Subject<FeedMessage>();
  const touched$ = new Subject<string>();
  const holders = new Map<string, Holder>();
  const silentNow = new Map<string, boolean>();
  /** beginning of the newest frame that pages had of each channel */
  const drawn = new Map<string, number>();
  let trouble: string | null = null;

  const say = (message: FeedMessage) => news$.next(message);
  const setTrouble = (text: string | null) => {
    if (text === trouble) return;
    trouble = text;
    if (text !== null) needs.warn(text);
    say({ kind: 'trouble', text });
  };
  const attempt = (written: Promise<unknown>) => {
    written.catch((error: Error) => setTrouble(`what happens is not being recorded: ${error.message}`));
  };
  const recorder = createRecorder(store, setTrouble);
  const newestWarning = (await store.warnings({ newest: true, most: 1 }))[0]?.id ?? 0;
  const written = createJournal(store, newestWarning, () => now().server, say, setTrouble);
  const journal: Journal = {
    ...written,
    issue(warning) {
      written.issue(warning);
      deliveries.issued(warning);
    },
    change(warning) {
      written.change(warning);
      deliveries.changed(warning);
    },
  };
  channels.load(await store.channels());
  const deliveries = createDeliveries({
    store,
    journal,
    receivers: needs.receivers ?? [],
    source: settings.eventSource,
    now: () => now().server,
    channelTime: (channel) => channels.time(channel, now().server),
    watch: (watch) => (watches.has(watch) ? watches.state(watch) : null),
    delivered: (watch, warning) => watches.delivered(watch, warning),
    acted(warning, by, text) {
      try {
        watches.actOn(warning, { acted: true, by, text });
      } catch {
        // it is so old that no running watch has it any more
      }
    },
  });
  const leftOut = await createLeftOut({
    store,
    channels,
    journal,
    changed: () => watches.leftOutChanged(),
  });
  const watches = createWatches({
    store,
    channels,
    journal,
    serverTime: () => now().server,
    createWatch: needs.createWatch,
    readModel: needs.readModel,
    leftOut: leftOut.of,
    silent: (channel) => !channels.has(channel) || channels.silent(channel, now()),
    touch: (watch) => touched$.next(`watch ${watch}`),
    traced: (watch, times, values) => traces$.next({ watch, times, values }),
    flushFrames: recorder.flush,
    failed: (text) => {
      needs.warn(text);
      journal.log({ kind: 'server', channel: null, watch: null, by: null, text });
    },
  });
  await watches.start();
  // a server killed again within a second must not catch up from the same place each time
  attempt(watches.saveProgress());
  await deliveries.start();
  const trials = createTrials({
    store,
    journal,
    deliveries,
    now,
    watch: (watch) => watches.state(watch),
    producer(channel) {
      const holder = holders.get(channel);
      return holder === undefined || channels.silent(channel, now()) ? null : holder.trial;
    },
    interval: channels.interval,
    say,
  });
  const keeping = createKeeping({
    store,
    settings,
    watches,
    journal,
    serverTime: () => now().server,
    warn: needs.warn,
  });

  const take: IngestDoors['take'] = (frame, arrival, settled, mark) => {
    const gaps = channels.take(frame, now());
    counts.frames.add(frame.channel, 1);
    counts.samples.add(frame.channel, frame.values.length);
    if (gaps > 0) attempt(store.countFault(frame.channel, 'gap', gaps));
    recorder.append(frame, (problem) => {
      if (problem === null) channels.stored(frame);
      else channels.notStored(frame);
      settled(problem);
    });
    watches.push(frame);
    trials.took(frame, arrival, mark);
    touched$.next(`channel ${frame.channel}`);
    // a frame that could not be stored comes again: it is drawn already
    if (frame.t0 <= (drawn.get(frame.channel) ?? Number.NEGATIVE_INFINITY)) return;
    drawn.set(frame.channel, frame.t0);
    frames$.next(frame);
  };

  const inUse = (channel: string, run: string | null, session: IngestSession): Refusal | null => {
    const holder = holders.get(channel);
    if (!holder || holder.session === session) return null;
    // A producer that comes back before its old connection was noticed to be dead is the same producer.
    const same = run !== null && holder.run === run;
    if (same || channels.silent(channel, now())) return null;
    return {
      code: 'CHANNEL_IN_USE',
      channel,
      detail: `another producer is sending to "${channel}"; stop it first, or use another channel name`,
    };
  };

  const hold = (channel: string, holder: Holder) => {
    const before = holders.get(channel);
    if (before?.session === holder.session) return;
    holders.set(channel, holder);
    channels.connect(channel, 1);
    if (before) {
      channels.connect(channel, -1);
      before.session.end();
      before.close(TAKEN_OVER, 'another connection took over');
    }
    touched$.next(`channel ${channel}`);
  };

  const release = (session: IngestSession) => {
    for (const [channel, holder] of holders) {
      if (holder.session !== session) continue;
      holders.delete(channel);
      channels.connect(channel, -1);
      touched$.next(`channel ${channel}`);
    }
  };

  /** why a producer may not have a channel, or null; `more`: new ones it names besides */
  const notHad = (channel: string, run: string | null, holder: Holder, more: number): Refusal | null => {
    if (!holder.feeds(channel))
      return {
        code: 'NOT_ALLOWED',
        channel,
        detail: `this token may not feed "${channel}"; use the token of that channel, or create one`,
      };
    if (channels.has(channel)) return inUse(channel, run, holder.session);
    const all = channels.names().length;
    if (all + more < settings.mostChannels) return null;
    return {
      code: 'TOO_MANY_CHANNELS',
      channel,
      detail: `there are ${all} channels and "${channel}" would be beyond the ${settings.mostChannels} there may be; use one there is, or raise mostChannels in settings.json`,
    };
  };

  const greet = async (hello: Hello, holder: Holder): ReturnType<IngestDoors['greet']> => {
    let more = 0;
    for (const { channel } of hello.channels) {
      const refusal = notHad(channel, hello.run, holder, more);
      if (refusal) return { ok: false, refusal };
      if (!channels.has(channel)) more++;
    }
    const saving: Promise<void>[] = [];
    for (const description of hello.channels) {
      channels.describe(description);
      hold(description.channel, holder);
      saving.push(store.saveChannel(description));
    }
    recorder.flush();
    await Promise.all(saving);
    const runs = await Promise.all(
      hello.channels.map(async ({ channel }) => [channel, await store.run(channel, hello.run)] as const),
    );
    return { ok: true, runs: new Map(runs) };
  };

  const claim = (channel: string, interval: number | null, holder: Holder): Refusal | null => {
    const refusal = notHad(channel, null, holder, 0);
    if (refusal) return refusal;
    if (!channels.has(channel)) {
      const description = { channel, unit: '', label: '', interval, low: null, high: null };
      channels.describe(description);
      attempt(store.saveChannel(description));
    }
    hold(channel, holder);
    return null;
  };

  const refused = (channel: string | null, code: IngestErrorCode, detail: string) => {
    counts.refused.add(code, 1);
    const named = channel === null ? {} : { channel };
    log({ level: 'notice', event: 'frame refused', text: detail, code, ...named });
    if (channel === null || !channels.has(channel)) return;
    channels.refused(channel, detail);
    touched$.next(`channel ${channel}`);
  };

  const hole = (channel: string, from: number, to: number) => {
    channels.hole(channel, to - from + 1);
    attempt(store.countFault(channel, 'hole', to - from + 1));
    const frames = from === to ? `frame ${from}` : `frames ${from} to ${to}`;
    journal.log({ kind: 'hole', channel, watch: null, by: null, text: `the producer skipped ${frames}` });
  };

  const producer: Hub['producer'] = (reply, close, feeds = () => true, roundTrip = async () => null) => {
    const trial: TrialProducer = { ask: (id, channel) => reply({ trial: id, channel }), roundTrip };
    const holder = { run: null, close, feeds, trial } as unknown as Holder;
    const session = createIngestSession(
      {
        greet(hello) {
          holder.run = hello.run;
          return greet(hello, holder);
        },
        claim: (channel, interval) => claim(channel, interval, holder),
        newest: channels.newest,
        take,
        skip: recorder.skip,
        hole,
        refused,
        reply,
        close,
      },
      { window: settings.ingestWindow, largestFrame: settings.largestFrame },
    );
    holder.session = session;
    return {
      message: session.message,
      end() {
        session.end();
        release(session);
      },
    };
  };

  const tellOfClocks = () => {
    for (const { channel, wrong, offset, text } of newsOfClocks(channels, now())) {
      channels.noteClock(channel, wrong);
      touched$.next(`channel ${channel}`);
      const level = wrong ? 'warning' : 'notice';
      log({ level, event: 'channel clock', text, channel, seconds: offset });
      journal.log({ kind: 'server', channel, watch: null, by: null, text });
    }
  };

  return {
    channels,
    watches,
    counts,
    leftOut,
    journal,
    deliveries,
    trials,
    recorder,
    store,
    settings,
    now,
    producer,
    frames$,
    traces$,
    news$,
    touched$,
    trouble: () => trouble,
    tick() {
      watches.tick();
      for (const { watch } of watches.states()) touched$.next(`watch ${watch}`);
      for (const name of channels.names()) {
        const silent = channels.silent(name, now());
        if (silentNow.get(name) !== silent) touched$.next(`channel ${name}`);
        silentNow.set(name, silent);
      }
      attempt(watches.saveProgress());
      journal.retry();
      keeping.tick();
      tellOfClocks();
    },
    clockStepped: channels.serverStepped,
    async close() {
      await keeping.close();
      await deliveries.close();
      await recorder.idle();
      await watches.saveProgress();
      await journal.idle();
      for (const subject of [frames$, traces$, news$, touched$]) subject.complete();
    },
  };
}
