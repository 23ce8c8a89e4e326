import type { FeedMessage } from '../shared-types/feed.ts';
import { appendColumns, createPoints, type Points, trimBefore } from './columns.ts';
import type { PageState } from './feedState.ts';
import { type Clock, createClock, steer } from './now.ts';

/** What the strips are drawn from; changed in place as messages come. `version` counts a line's changes. */
export interface DrawingData {
  signals: Map<string, Line>;
  traces: Map<string, Line>;
  clocks: Map<string, Clock>;
}

export interface Line {
  points: Points;
  version: number;
}

/** No lines yet. */
export function createDrawingData(): DrawingData {
  return { signals: new Map(), traces: new Map(), clocks: new Map() };
}

/**
 * Takes a message's drawing data and clock reports; other messages change nothing.
 *
 * @param look     how much of the past is drawn, seconds, and its columns
 * @param received monotonic moment of arrival, seconds
 */
export function draw(
  data: DrawingData,
  state: PageState,
  message: FeedMessage,
  look: { seconds: number; columns: number },
  received: number,
): void {
  if (message.kind === 'welcome')
    for (const channel of message.welcome.channels) setClock(data, channel, received);
  if (message.kind === 'channel') setClock(data, message.channel, received);
  if (message.kind === 'signal') {
    steer(clockOf(data, message.channel), message.newest, message.age, received);
    const interval = state.channels.get(message.channel)?.interval ?? null;
    extend(lineOf(data.signals, message.channel), message, gapSeconds(interval, look), look.seconds);
  }
  if (message.kind === 'trace') {
    const interval = state.watches.get(message.watch)?.interval ?? null;
    extend(lineOf(data.traces, message.watch), message, gapSeconds(interval, look), look.seconds);
  }
}

/** Columns further apart than this (s) are not joined: clearly more than an interval and than a drawn column. */
export function gapSeconds(interval: number | null, look: { seconds: number; columns: number }): number {
  return interval === null ? Infinity : Math.max(4.5 * interval, (4 * look.seconds) / look.columns);
}

/** The line of a name, made empty when there is none yet. */
export function lineOf(lines: Map<string, Line>, name: string): Line {
  let line = lines.get(name);
  if (line === undefined) lines.set(name, (line = { points: createPoints(), version: 0 }));
  return line;
}

function extend(
  line: Line,
  message: Extract<FeedMessage, { kind: 'signal' | 'trace' }>,
  gap: number,
  kept: number,
): void {
  if (message.replace) line.points = createPoints();
  appendColumns(line.points, message.columns, gap);
  const { x } = line.points;
  // twice what is drawn stays, so that a wider look shows something until the server has sent the rest
  if (x.length > 0) trimBefore(line.points, x[x.length - 1]! - 2 * kept);
  line.version++;
}

function setClock(
  data: DrawingData,
  channel: { channel: string; newest: number | null; age: number | null },
  received: number,
): void {
  if (channel.newest !== null && channel.age !== null)
    steer(clockOf(data, channel.channel), channel.newest, channel.age, received);
}

function clockOf(data: DrawingData, channel: string): Clock {
  let clock = data.clocks.get(channel);
  if (clock === undefined) data.clocks.set(channel, (clock = createClock()));
  return clock;
}
