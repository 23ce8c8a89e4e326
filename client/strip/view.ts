import type { ChannelState } from '../../shared-types/channel.ts';
import type { Warning } from '../../shared-types/warning.ts';
import type { WatchState } from '../../shared-types/watch.ts';
import type { Points } from '../columns.ts';
import type { DrawingData } from '../drawingData.ts';
import type { PageState } from '../feedState.ts';
import { timeAt } from '../now.ts';

/** A strip of the page: a channel, and the watch drawn below it; null: the channel is drawn only. */
export interface StripKey {
  channel: string;
  watch: string | null;
}

/** A stretch of the past looked at closely, in seconds before the moment it was chosen. */
export interface Zoom {
  fromAgo: number;
  toAgo: number;
  /** monotonic moment of choosing */
  chosen: number;
}

/** What the whole page shows at a moment; strips read it and change nothing. */
export interface PageView {
  state: PageState;
  data: DrawingData;
  look: { seconds: number; columns: number };
  zoom: Zoom | null;
  /** seconds before now that is read off, by pointer or arrow keys; null: nothing */
  readAgo: number | null;
  /** a drag in progress, seconds before now */
  drag: { fromAgo: number; toAgo: number } | null;
  monotonic: number;
  /** server clock, Unix seconds */
  today: number;
  lost: boolean;
}

/** What a strip shows at a moment. */
export interface StripView {
  page: PageView;
  channel: ChannelState;
  watch: WatchState | null;
  /** the channel's time now; null before its first sample */
  now: number | null;
  /** times at the edges of the plot */
  from: number;
  to: number;
  /** the watch's warnings, oldest first, and those of them that are open */
  warnings: Warning[];
  open: Warning[];
  signal: Points;
  trace: Points;
}

const EMPTY: Points = { x: [], y: [] };

/** A strip's view out of the page's. Null when the channel is gone. */
export function viewOf(
  page: PageView,
  key: StripKey,
  warnings: Warning[],
  closeUp: CloseUp | null,
): StripView | null {
  const channel = page.state.channels.get(key.channel);
  if (channel === undefined) return null;
  const watch = key.watch === null ? null : (page.state.watches.get(key.watch) ?? null);
  const now = timeAt(page.data.clocks.get(key.channel), page.monotonic);
  const edge = edges(page, now ?? 0);
  return {
    page,
    channel,
    watch,
    now,
    ...edge,
    warnings,
    open: warnings.filter((warning) => warning.outcome === 'open' && !warning.quiet),
    signal: closeUp?.signal ?? page.data.signals.get(key.channel)?.points ?? EMPTY,
    trace:
      closeUp?.trace ?? (key.watch === null ? EMPTY : (page.data.traces.get(key.watch)?.points ?? EMPTY)),
  };
}

/** Lines fetched for a close look; each null until it has come. */
export interface CloseUp {
  signal: Points | null;
  trace: Points | null;
}

function edges(page: PageView, now: number): { from: number; to: number } {
  if (page.zoom === null) return { from: now - page.look.seconds, to: now };
  const chosenNow = now - (page.monotonic - page.zoom.chosen);
  return { from: chosenNow - page.zoom.fromAgo, to: chosenNow - page.zoom.toAgo };
}

/** The warning the strip's words are about: the newest open one whose span is not over, else the newest open one. */
export function spokenFor(view: StripView): Warning | null {
  const now = view.now ?? -Infinity;
  return view.open.findLast((warning) => now <= warning.to) ?? view.open[view.open.length - 1] ?? null;
}
