import type { Warning } from '../../shared-types/warning.ts';
import { pointsOf } from '../columns.ts';
import { element, mark } from '../dom.ts';
import { gapSeconds } from '../drawingData.ts';
import { columnsOf } from '../requests.ts';
import type { StripActions } from '../strip/spoken.ts';
import { createStrip, type Strip } from '../strip/strip.ts';
import { type CloseUp, type PageView, type StripView, viewOf, type Zoom } from '../strip/view.ts';
import { listenForPointer } from './pointer.ts';
import { stripHeight, stripKeys } from './stripKeys.ts';

/** Main-thread milliseconds the strips may paint in one frame; what is left is painted in the next. */
const PAINT_BUDGET = 5;
/** A strip is painted at most this often, seconds. */
const PAINT_EVERY = 0.045;

/** All strips of the page. */
export interface Strips {
  root: HTMLElement;
  /** makes and drops strips as the state calls for, and says their words; a few times a second */
  tell(): void;
  /** one animation frame: slides, and paints what is due within the budget */
  animate(): void;
  paintAll(): void;
  onColumns(run: (columns: number) => void): void;
  views(): StripView[];
  /** the strip with the keyboard's focus */
  chosen(): StripView | null;
  move(by: 1 | -1): void;
  read(by: 1 | -1): void;
  live(): void;
  /** looks closely at a channel's strip between two times (s); false: its time is not known yet */
  lookAt(channel: string, from: number, to: number): boolean;
}

interface Entry {
  strip: Strip;
  paintedAt: number;
  closeUp: CloseUp | null;
}

/** Creates the list of strips; `page` is read at every call and its zoom, reading and drag are written by the pointer. */
export function createStrips(page: PageView, actions: StripActions): Strips {
  const root = element('main', 'strips');
  const entries = new Map<string, Entry>();
  let columnsWanted: (columns: number) => void = () => {};
  let byWatch: { of: PageView['state']['warnings'] | null; lists: Map<string, Warning[]> } = {
    of: null,
    lists: new Map(),
  };
  let laidOut = '';

  const warningsOf = (watch: string | null): Warning[] => {
    if (byWatch.of !== page.state.warnings)
      byWatch = { of: page.state.warnings, lists: groupByWatch(page.state.warnings.values()) };
    return (watch === null ? undefined : byWatch.lists.get(watch)) ?? [];
  };
  const view = (entry: Entry): StripView | null =>
    viewOf(page, entry.strip.key, warningsOf(entry.strip.key.watch), entry.closeUp);
  const all = (): [Entry, StripView][] =>
    [...entries.values()].flatMap((entry): [Entry, StripView][] => {
      const seen = view(entry);
      return seen === null ? [] : [[entry, seen]];
    });

  const layOut = () => {
    const first = entries.values().next().value?.strip;
    if (first === undefined) return;
    const plotWidth = first.plot.clientWidth;
    const aheadWidth = (first.root.querySelector('.ahead') as HTMLElement).clientWidth;
    const height = stripHeight(entries.size, innerHeight, 76 + 150);
    const key = `${plotWidth} ${aheadWidth} ${height} ${entries.size} ${devicePixelRatio}`;
    if (key === laidOut || plotWidth === 0) return;
    laidOut = key;
    mark(root, 'data-tight', height < 215 ? 'yes' : null);
    for (const { strip } of entries.values()) strip.setSize(height, plotWidth, aheadWidth);
    columnsWanted(Math.max(100, Math.round(plotWidth * Math.min(2, devicePixelRatio))));
  };
  const observer = new ResizeObserver(layOut);
  observer.observe(root);
  addEventListener('resize', layOut);

  const synchronise = () => {
    const wanted = stripKeys(page.state);
    const names = wanted.map((key) => `${key.channel}\n${key.watch ?? ''}`);
    for (const [name, entry] of entries) {
      if (names.includes(name)) continue;
      entry.strip.destroy();
      entry.strip.root.remove();
      entries.delete(name);
    }
    names.forEach((name, i) => {
      if (!entries.has(name))
        entries.set(name, { strip: createStrip(wanted[i]!, actions), paintedAt: -Infinity, closeUp: null });
      const { root: strip } = entries.get(name)!.strip;
      if (root.children[i] !== strip) root.insertBefore(strip, root.children[i] ?? null);
    });
    layOut();
    return new Map(
      wanted.map(({ channel }) => [channel, wanted.filter((key) => key.channel === channel).length]),
    );
  };

  const closer = (zoom: Zoom) => {
    page.zoom = zoom;
    page.readAgo = null;
    for (const [entry, seen] of all()) void fetchCloseUp(entry, seen);
  };
  const fetchCloseUp = async (entry: Entry, seen: StripView) => {
    const zoom = page.zoom;
    const { channel, watch } = entry.strip.key;
    const margin = (seen.to - seen.from) * 0.02;
    const ask = async (kind: 'channels' | 'watches', name: string, interval: number | null) => {
      const columns = page.look.columns;
      const fetched = await columnsOf({ kind, name }, seen.from - margin, seen.to + margin, columns);
      return pointsOf(fetched, gapSeconds(interval, { seconds: seen.to - seen.from, columns }));
    };
    const keep = async (part: keyof CloseUp, points: ReturnType<typeof ask>) => {
      const came = await points.catch(() => null);
      if (came === null || page.zoom !== zoom || came.x.length === 0) return;
      entry.closeUp = { signal: null, trace: null, ...entry.closeUp, [part]: came };
      entry.paintedAt = -Infinity;
    };
    void keep('signal', ask('channels', channel, seen.channel.interval));
    if (watch !== null) void keep('trace', ask('watches', watch, seen.watch?.interval ?? null));
  };

  const live = () => {
    page.zoom = page.readAgo = page.drag = null;
    for (const entry of entries.values()) {
      entry.closeUp = null;
      delete entry.strip.root.dataset.read;
    }
  };
  const focused = () =>
    [...entries.values()].find(({ strip }) => strip.root.contains(document.activeElement)) ?? null;
  const readOff = (entry: Entry | null, ago: number | null) => {
    page.readAgo = ago;
    for (const each of entries.values())
      mark(each.strip.root, 'data-read', each === entry && ago !== null ? 'yes' : null);
  };

  listenForPointer(root, {
    agoAt: (target, x) => {
      const entry = [...entries.values()].find(({ strip }) => strip.plot.contains(target));
      const seen = entry ? view(entry) : null;
      return entry && seen ? { entry, ago: entry.strip.agoAt(x, seen), seen } : null;
    },
    read: (found) => readOff(found?.entry ?? null, found?.ago ?? null),
    drag: (drag) => {
      page.drag = drag;
    },
    zoom: (fromAgo, toAgo) => {
      const shift = page.zoom === null ? 0 : page.zoom.toAgo;
      closer({ fromAgo: fromAgo + shift, toAgo: toAgo + shift, chosen: page.zoom?.chosen ?? page.monotonic });
    },
    live,
  });

  const changesOf = (entry: Entry, seen: StripView): string => {
    const { channel, watch } = entry.strip.key;
    const signal = page.data.signals.get(channel)?.version ?? 0;
    const trace = watch === null ? 0 : (page.data.traces.get(watch)?.version ?? 0);
    const switches = watch === null ? 0 : (page.state.switches.get(watch)?.length ?? 0);
    const data =
      page.zoom === null
        ? `${signal} ${trace}`
        : `${entry.closeUp?.signal ? 1 : 0}${entry.closeUp?.trace ? 1 : 0}`;
    return `${data} ${switches} ${seen.warnings.length} ${page.look.seconds} ${seen.from === seen.to ? '' : (seen.to - seen.from).toFixed(3)} ${seen.watch?.regimeNow}`;
  };
  const animate = (budget = PAINT_BUDGET) => {
    const began = performance.now();
    const seen = all();
    for (const [{ strip }, each] of seen) strip.slide(each);
    const due = seen.filter(
      ([entry, each]) =>
        page.monotonic - entry.paintedAt >= PAINT_EVERY && entry.strip.isDue(each, changesOf(entry, each)),
    );
    due.sort((a, b) => a[0].paintedAt - b[0].paintedAt);
    for (const [entry, each] of due) {
      if (performance.now() - began > budget) break;
      entry.paintedAt = page.monotonic;
      entry.strip.paint(each, changesOf(entry, each));
    }
  };

  return {
    root,
    tell: () => {
      const counts = synchronise();
      for (const [{ strip }, seen] of all()) strip.tell(seen, (counts.get(strip.key.channel) ?? 0) > 1);
    },
    animate: () => animate(),
    paintAll: () => {
      for (const entry of entries.values()) entry.paintedAt = -Infinity;
      for (const [entry, seen] of all()) entry.strip.paint(seen, '');
    },
    onColumns: (run) => {
      columnsWanted = run;
    },
    views: () => all().map(([, seen]) => seen),
    chosen: () => {
      const entry = focused();
      return entry === null ? null : view(entry);
    },
    move: (by) => {
      const list = [...root.children] as HTMLElement[];
      const at = list.findIndex((each) => each.contains(document.activeElement));
      const next = at < 0 ? (by > 0 ? 0 : list.length - 1) : Math.min(list.length - 1, Math.max(0, at + by));
      list[next]?.focus();
      list[next]?.scrollIntoView({ block: 'nearest' });
    },
    lookAt: (channel, from, to) => {
      const entry = [...entries.values()].find(({ strip }) => strip.key.channel === channel);
      const now = entry === undefined ? null : (view(entry)?.now ?? null);
      if (entry === undefined || now === null) return false;
      // a look cannot reach beyond now: it is moved back instead
      const beyond = Math.max(0, to - now);
      closer({ fromAgo: now - from + beyond, toAgo: now - to + beyond, chosen: page.monotonic });
      entry.strip.root.focus({ preventScroll: true });
      entry.strip.root.scrollIntoView({ block: 'nearest' });
      return true;
    },
    read: (by) => {
      const entry = focused() ?? entries.values().next().value ?? null;
      const seen = entry ? view(entry) : null;
      if (entry === null || seen === null) return;
      const span = seen.to - seen.from;
      const ago = Math.min(span, Math.max(0, (page.readAgo ?? 0) - (by * span) / 180));
      readOff(entry, ago);
    },
    live,
  };
}

function groupByWatch(warnings: Iterable<Warning>): Map<string, Warning[]> {
  const lists = new Map<string, Warning[]>();
  for (const warning of warnings) {
    const list = lists.get(warning.watch);
    if (list === undefined) lists.set(warning.watch, [warning]);
    else list.push(warning);
  }
  return lists;
}
