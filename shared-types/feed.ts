import type { ChannelState, Columns } from './channel.ts';
import type { MeasuredDelay, Trial, TrialSeen } from './delivery.ts';
import type { LogEntry, SwitchEvent, Warning } from './warning.ts';
import type { WatchState } from './watch.ts';

/** WebSocket subprotocol of `/feed`: binary CBOR from the server, JSON text from the page. */
export const FEED_PROTOCOL = 'foreshift.feed.1';

/** What a page says: how much of the past it draws and how many columns of pixels it has for it; that it has shown a trial. */
export type FeedRequest = { look: { seconds: number; columns: number } } | TrialSeen;

/** What the server says to a page. The first message is a `welcome`; everything later changes it. */
export type FeedMessage =
  | { kind: 'welcome'; welcome: Welcome }
  | { kind: 'channel'; channel: ChannelState }
  | { kind: 'watch'; watch: WatchState }
  /** new, or changed (outcome, acknowledged, delivered) */
  | { kind: 'warning'; warning: Warning }
  | { kind: 'switch'; switch: SwitchEvent }
  | { kind: 'log'; entry: LogEntry }
  /** to be shown as a trial, and echoed once it is */
  | { kind: 'trial'; trial: Trial }
  /** what a trial found out */
  | { kind: 'delay'; delay: MeasuredDelay }
  /** new drawing data; `replace`: what the page has for this series is to be dropped first */
  | { kind: 'signal'; channel: string; columns: Columns; replace: boolean; newest: number; age: number }
  | { kind: 'trace'; watch: string; columns: Columns; replace: boolean }
  /** the store cannot write: what is shown is not being recorded; null when it can again */
  | { kind: 'trouble'; text: string | null }
  /** at least one a second, so that a page knows it is connected */
  | { kind: 'beat'; serverTime: number };

export interface Welcome {
  program: string;
  /** server clock, Unix seconds; when this server process started */
  serverTime: number;
  startedAt: number;
  demo: boolean;
  /** address producers connect to, for the first-visit lines */
  ingestAddress: string;
  trouble: string | null;
  channels: ChannelState[];
  watches: WatchState[];
  /** the newest 200, oldest first */
  warnings: Warning[];
  /** those within the last hour of each channel's time, oldest first, at most 2000 */
  switches: SwitchEvent[];
  /** the newest measured delay of each watch that has one; absent from older servers */
  delays?: MeasuredDelay[];
}
