import type { ChannelDescription, ChannelState } from '../../../shared-types/channel.ts';
import type { FrameToStore, StoredChannel } from '../../store/store.ts';
import {
  type ClockOffset,
  channelTime,
  createClockOffset,
  noteArrival,
  serverStepped,
} from './clockOffset.ts';

/** A moment by both clocks: Unix seconds of the server, and seconds that never step. */
export interface Moment {
  server: number;
  monotonic: number;
}

/** Times below this are elapsed time, not Unix time: no offset to the server's clock is shown. */
const ELAPSED_BELOW = 1e8;
const SATURATION_SAMPLES = 1000;
/** interarrival times the usual one is the median of */
const ARRIVALS_KEPT = 9;
const LEAST_SILENCE_SECONDS = 1;
const RATE_SECONDS = 5;
/** a gap is more than this many intervals without a sample */
const GAP_INTERVALS = 3;

interface Channel {
  description: ChannelDescription;
  samples: number;
  holes: number;
  gaps: number;
  first: number | null;
  newest: number | null;
  /** time of the newest sample on disk */
  durable: number | null;
  value: number | null;
  /** the newest value was finite: a run of missing values counts as one gap */
  sawValue: boolean;
  connected: number;
  arrivedAt: number | null;
  betweenFrames: number[];
  saturation: Uint8Array;
  saturationCount: number;
  saturationPlace: number;
  saturationSum: number;
  clock: ClockOffset;
  clockWrong: boolean;
  /** samples that arrived in second s of the monotonic clock, at s mod length */
  arrivals: { second: number; count: number }[];
  firstArrival: number | null;
  refused: number;
  refusal: string | null;
}

export interface Channels {
  load(stored: StoredChannel[]): void;
  /** makes the channel known, or changes what is said of it */
  describe(description: ChannelDescription): void;
  has(channel: string): boolean;
  names(): string[];
  description(channel: string): ChannelDescription;
  /** notes the samples of a frame; returns how many gaps it showed */
  take(frame: FrameToStore, moment: Moment): number;
  /** a frame taken is on disk */
  stored(frame: FrameToStore): void;
  /** a frame taken could not be stored: its samples have no ordinals, and it may come again */
  notStored(frame: FrameToStore): void;
  connect(channel: string, by: 1 | -1): void;
  hole(channel: string, frames: number): void;
  refused(channel: string, reason: string): void;
  newest(channel: string): number | null;
  /** time of the newest sample and the newest value; null before there is one */
  newestSample(channel: string): { time: number; value: number } | null;
  /** ordinal of the next sample to be stored */
  samples(channel: string): number;
  silent(channel: string, moment: Moment): boolean;
  /** channel time at a moment of the server clock */
  time(channel: string, serverTime: number): number | null;
  leastOffset(channel: string): number | null;
  restoreOffset(channel: string, least: number | null): void;
  /** whether its clock is beyond what is tolerated */
  noteClock(channel: string, wrong: boolean): void;
  /** the server's clock was set forwards by so many seconds */
  serverStepped(seconds: number): void;
  interval(channel: string): number | null;
  state(channel: string, moment: Moment): ChannelState;
  states(moment: Moment): ChannelState[];
}

function createChannel(description: ChannelDescription): Channel {
  return {
    description,
    samples: 0,
    holes: 0,
    gaps: 0,
    first: null,
    newest: null,
    durable: null,
    value: null,
    sawValue: true,
    connected: 0,
    arrivedAt: null,
    betweenFrames: [],
    saturation: new Uint8Array(SATURATION_SAMPLES),
    saturationCount: 0,
    saturationPlace: 0,
    saturationSum: 0,
    clock: createClockOffset(null),
    clockWrong: false,
    arrivals: [],
    firstArrival: null,
    refused: 0,
    refusal: null,
  };
}

const lastTime = (frame: FrameToStore): number =>
  frame.times ? frame.times[frame.times.length - 1]! : frame.t0 + frame.dt * (frame.values.length - 1);

function noteSaturation(channel: Channel, value: number): void {
  const { low, high } = channel.description;
  const at = channel.saturationPlace;
  const flag = (low !== null && value <= low) || (high !== null && value >= high) ? 1 : 0;
  channel.saturationSum += flag - channel.saturation[at]!;
  channel.saturation[at] = flag;
  channel.saturationPlace = at + 1 === SATURATION_SAMPLES ? 0 : at + 1;
  if (channel.saturationCount < SATURATION_SAMPLES) channel.saturationCount++;
}

function noteValues(channel: Channel, values: Float64Array): number {
  let gaps = 0;
  let last = Number.NaN;
  for (let i = 0; i < values.length; i++) {
    const value = values[i]!;
    if (Number.isNaN(value)) {
      if (channel.sawValue) gaps++;
      channel.sawValue = false;
    } else {
      channel.sawValue = true;
      last = value;
    }
  }
  // Only the newest thousand can matter for the share.
  for (let i = Math.max(0, values.length - SATURATION_SAMPLES); i < values.length; i++)
    noteSaturation(channel, values[i]!);
  if (!Number.isNaN(last)) channel.value = last;
  return gaps;
}

function noteFrameArrival(channel: Channel, count: number, monotonic: number): void {
  if (channel.arrivedAt !== null) {
    channel.betweenFrames.push(monotonic - channel.arrivedAt);
    if (channel.betweenFrames.length > ARRIVALS_KEPT) channel.betweenFrames.shift();
  }
  channel.arrivedAt = monotonic;
  channel.firstArrival ??= monotonic;
  const second = Math.floor(monotonic);
  const newest = channel.arrivals[channel.arrivals.length - 1];
  if (newest?.second === second) newest.count += count;
  else {
    channel.arrivals.push({ second, count });
    if (channel.arrivals.length > RATE_SECONDS + 1) channel.arrivals.shift();
  }
}

/** Samples a second over the last whole seconds; null before there is one. */
function rateOf(channel: Channel, monotonic: number): number | null {
  if (channel.firstArrival === null) return null;
  const now = Math.floor(monotonic);
  const seconds = Math.min(RATE_SECONDS, now - Math.floor(channel.firstArrival) - 1);
  if (seconds < 1) return null;
  let count = 0;
  for (const arrival of channel.arrivals)
    if (arrival.second < now && arrival.second >= now - seconds) count += arrival.count;
  return count / seconds;
}

function usualBetweenFrames(channel: Channel): number {
  if (channel.betweenFrames.length === 0) return 0;
  const sorted = [...channel.betweenFrames].sort((a, b) => a - b);
  return sorted[sorted.length >> 1]!;
}

function isSilent(channel: Channel, monotonic: number): boolean {
  if (channel.arrivedAt === null) return true;
  return monotonic - channel.arrivedAt > Math.max(LEAST_SILENCE_SECONDS, 2 * usualBetweenFrames(channel));
}

/** The interval that gaps are measured with: what the producer said, or what its newest frame did. */
function noteInterval(channel: Channel, frame: FrameToStore): void {
  if (channel.description.interval !== null) return;
  const { times, values, dt } = frame;
  const interval = times ? (times[times.length - 1]! - times[0]!) / (times.length - 1) : dt;
  if (values.length > 1 && interval > 0) channel.description = { ...channel.description, interval };
}

/** Seconds since the newest sample came; after a restart, where nothing has come yet, since its own time. */
function ageOf({ arrivedAt, newest }: Channel, { server, monotonic }: Moment): number | null {
  if (arrivedAt !== null) return monotonic - arrivedAt;
  return newest === null || newest < ELAPSED_BELOW ? null : Math.max(0, server - newest);
}

function stateOf(channel: Channel, moment: Moment): ChannelState {
  const { monotonic } = moment;
  const elapsedTime = channel.newest === null || channel.newest < ELAPSED_BELOW;
  return {
    ...channel.description,
    first: channel.first,
    newest: channel.newest,
    value: channel.value,
    age: ageOf(channel, moment),
    connected: channel.connected > 0,
    silent: isSilent(channel, monotonic),
    clockOffset: elapsedTime ? null : channel.clock.smooth,
    clockWrong: channel.clockWrong,
    samples: channel.samples,
    holes: channel.holes,
    gaps: channel.gaps,
    saturated: channel.saturationCount === 0 ? 0 : channel.saturationSum / channel.saturationCount,
    rate: rateOf(channel, monotonic),
    refused: channel.refused,
    refusal: channel.refusal,
  };
}

/** The registry of channels: what is known of each, from the store at the start and from its frames since. */
export function createChannels(): Channels {
  const channels = new Map<string, Channel>();
  const get = (name: string): Channel => {
    const channel = channels.get(name);
    if (!channel) throw new RangeError(`there is no channel "${name}"; describe it first`);
    return channel;
  };
  return {
    load(stored) {
      for (const { samples, holes, gaps, first, newest, value, ...description } of stored)
        channels.set(description.channel, {
          ...createChannel(description),
          samples,
          holes,
          gaps,
          first,
          newest,
          durable: newest,
          value,
        });
    },
    describe(description) {
      const known = channels.get(description.channel);
      if (known) known.description = description;
      else channels.set(description.channel, createChannel(description));
    },
    has: (name) => channels.has(name),
    names: () => [...channels.keys()].sort(),
    description: (name) => get(name).description,
    take(frame, moment) {
      const channel = get(frame.channel);
      const before = channel.newest;
      noteInterval(channel, frame);
      const { interval } = channel.description;
      let gaps = noteValues(channel, frame.values);
      if (before !== null && interval !== null && frame.t0 - before > GAP_INTERVALS * interval) gaps++;
      channel.first ??= frame.t0;
      channel.newest = lastTime(frame);
      channel.samples += frame.values.length;
      channel.gaps += gaps;
      noteFrameArrival(channel, frame.values.length, moment.monotonic);
      noteArrival(channel.clock, channel.newest, moment.server);
      return gaps;
    },
    stored(frame) {
      get(frame.channel).durable = lastTime(frame);
    },
    notStored(frame) {
      const channel = get(frame.channel);
      channel.samples -= frame.values.length;
      channel.newest = channel.durable;
      if (channel.durable === null) channel.first = null;
    },
    connect(name, by) {
      get(name).connected += by;
    },
    hole(name, frames) {
      get(name).holes += frames;
    },
    refused(name, reason) {
      const channel = channels.get(name);
      if (!channel) return;
      channel.refused++;
      channel.refusal = reason;
    },
    newest: (name) => channels.get(name)?.newest ?? null,
    newestSample(name) {
      const { newest = null, value = null } = channels.get(name) ?? {};
      return newest === null || value === null ? null : { time: newest, value };
    },
    samples: (name) => channels.get(name)?.samples ?? 0,
    silent: (name, { monotonic }) => isSilent(get(name), monotonic),
    time: (name, serverTime) => {
      const channel = channels.get(name);
      return channel ? channelTime(channel.clock, serverTime) : null;
    },
    leastOffset: (name) => channels.get(name)?.clock.least ?? null,
    restoreOffset(name, least) {
      const channel = channels.get(name);
      if (channel && channel.clock.least === null) channel.clock = createClockOffset(least);
    },
    noteClock(name, wrong) {
      get(name).clockWrong = wrong;
    },
    serverStepped(seconds) {
      for (const { clock } of channels.values()) serverStepped(clock, seconds);
    },
    interval: (name) => channels.get(name)?.description.interval ?? null,
    state: (name, moment) => stateOf(get(name), moment),
    states: (moment) => [...channels.keys()].sort().map((name) => stateOf(get(name), moment)),
  };
}
