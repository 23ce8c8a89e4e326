import type { ChannelState } from '../shared-types/channel.ts';
import type { MeasuredDelay } from '../shared-types/delivery.ts';
import type { FeedMessage, Welcome } from '../shared-types/feed.ts';
import type { LogEntry, SwitchEvent, Warning } from '../shared-types/warning.ts';
import type { WatchState } from '../shared-types/watch.ts';

/** What the page knows, apart from drawing data. Never changed in place: a new one after each message. */
export interface PageState {
  /** a welcome has come */
  welcomed: boolean;
  program: string;
  demo: boolean;
  startedAt: number;
  ingestAddress: string;
  /** newest server clock heard, Unix seconds */
  serverTime: number;
  trouble: string | null;
  channels: ReadonlyMap<string, ChannelState>;
  watches: ReadonlyMap<string, WatchState>;
  /** by id, in order of issue, the newest `WARNINGS_KEPT` */
  warnings: ReadonlyMap<number, Warning>;
  /** by watch, each ascending in time, the newest `SWITCHES_KEPT` */
  switches: ReadonlyMap<string, readonly SwitchEvent[]>;
  /** the newest `ENTRIES_KEPT`, oldest first */
  log: readonly LogEntry[];
  /** by watch, the newest measured one */
  delays: ReadonlyMap<string, MeasuredDelay>;
}

export const WARNINGS_KEPT = 500;
export const SWITCHES_KEPT = 2000;
export const ENTRIES_KEPT = 200;

/** What the page knows before the server has spoken. */
export const NOTHING_YET: PageState = {
  welcomed: false,
  program: '',
  demo: false,
  startedAt: 0,
  ingestAddress: '',
  serverTime: 0,
  trouble: null,
  channels: new Map(),
  watches: new Map(),
  warnings: new Map(),
  switches: new Map(),
  log: [],
  delays: new Map(),
};

/** The state after a message. Kinds it does not know, and drawing data, leave it as it is (the same object). */
export function reduce(state: PageState, message: FeedMessage): PageState {
  switch (message.kind) {
    case 'welcome':
      return welcomed(message.welcome);
    case 'channel':
      return { ...state, channels: put(state.channels, message.channel.channel, message.channel) };
    case 'watch':
      return { ...state, watches: put(state.watches, message.watch.watch, message.watch) };
    case 'warning':
      return {
        ...state,
        warnings: newest(put(state.warnings, message.warning.id, message.warning), WARNINGS_KEPT),
      };
    case 'switch': {
      const before = state.switches.get(message.switch.watch) ?? [];
      return {
        ...state,
        switches: put(state.switches, message.switch.watch, withSwitch(before, message.switch)),
      };
    }
    case 'log':
      return { ...state, log: [...state.log, message.entry].slice(-ENTRIES_KEPT) };
    case 'delay':
      return { ...state, delays: put(state.delays, message.delay.watch, message.delay) };
    case 'trouble':
      return { ...state, trouble: message.text };
    case 'beat':
      return { ...state, serverTime: message.serverTime };
    default:
      return state;
  }
}

/** The state with warnings and switches from further back than the feed has told of. */
export function withPast(
  state: PageState,
  warnings: readonly Warning[],
  switches: readonly SwitchEvent[],
): PageState {
  const known = new Map([...warnings.map((warning) => [warning.id, warning] as const), ...state.warnings]);
  const past = switches.map((event): FeedMessage => ({ kind: 'switch', switch: event }));
  return {
    ...past.reduce(reduce, state),
    warnings: new Map([...known].sort((a, b) => a[0] - b[0])),
  };
}

function welcomed(welcome: Welcome): PageState {
  const switches = new Map<string, readonly SwitchEvent[]>();
  for (const event of welcome.switches)
    switches.set(event.watch, withSwitch(switches.get(event.watch) ?? [], event));
  return {
    ...NOTHING_YET,
    welcomed: true,
    program: welcome.program,
    demo: welcome.demo,
    startedAt: welcome.startedAt,
    ingestAddress: welcome.ingestAddress,
    serverTime: welcome.serverTime,
    trouble: welcome.trouble,
    channels: new Map(welcome.channels.map((channel) => [channel.channel, channel])),
    watches: new Map(welcome.watches.map((watch) => [watch.watch, watch])),
    warnings: new Map(welcome.warnings.map((warning) => [warning.id, warning])),
    switches,
    delays: new Map((welcome.delays ?? []).map((delay) => [delay.watch, delay])),
  };
}

function put<K, V>(map: ReadonlyMap<K, V>, key: K, value: V): ReadonlyMap<K, V> {
  return new Map(map).set(key, value);
}

function newest<V>(map: ReadonlyMap<number, V>, kept: number): ReadonlyMap<number, V> {
  return map.size <= kept ? map : new Map([...map].sort((a, b) => a[0] - b[0]).slice(-kept));
}

function withSwitch(events: readonly SwitchEvent[], event: SwitchEvent): readonly SwitchEvent[] {
  const last = events[events.length - 1];
  if (last === undefined || (last.at < event.at && last.id !== event.id))
    return [...events, event].slice(-SWITCHES_KEPT);
  const others = events.filter((known) => known.id !== event.id);
  return [...others, event].sort((a, b) => a.at - b.at).slice(-SWITCHES_KEPT);
}
