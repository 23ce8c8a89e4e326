import { indexAtOrAfter } from '../columns.ts';
import { element, mark, say } from '../dom.ts';
import { spanText } from '../words.ts';
import { createAhead, tickStepFor } from './ahead.ts';
import { createPair, type Pair } from './pair.ts';
import { VALUE_ROOM } from './panel.ts';
import { readingText, summaryText } from './reading.ts';
import { createSide } from './side.ts';
import { createSpoken, markStance, type StripActions } from './spoken.ts';
import type { StripKey, StripView } from './view.ts';

/** One strip of the page. */
export interface Strip {
  key: StripKey;
  root: HTMLElement;
  plot: HTMLElement;
  /** new height and widths, CSS pixels */
  setSize(height: number, plotWidth: number, aheadWidth: number): void;
  /** words and states; a few times a second */
  tell(view: StripView, several: boolean): void;
  /** the moving parts that cost nothing: spans, reading line; every frame */
  slide(view: StripView): void;
  /** whether the paper has moved by a pixel or `changes` differs since it was last drawn */
  isDue(view: StripView, changes: string): boolean;
  paint(view: StripView, changes: string): void;
  /** seconds before now (or before the end of a close look) at a pointer's x */
  agoAt(clientX: number, view: StripView): number;
  destroy(): void;
}

/** Room the words right of now need beside a span, CSS pixels. */
const WORDS_WIDTH = 256;

/** Creates a strip; it is drawn once it has a size. */
export function createStrip(key: StripKey, actions: StripActions): Strip {
  const side = createSide();
  const ahead = createAhead();
  const spoken = createSpoken(actions);
  const paper = element('div', 'paper');
  const selection = element('div', 'selection');
  const readingLine = element('div', 'readingLine');
  const reading = element('p', 'reading');
  const veil = element('p', 'veil');
  const plot = element('div', 'plot', paper, selection, readingLine, reading, veil);
  const summary = element('p', 'unseen');
  summary.id = `summary-${cssName(key)}`;
  const root = element('section', 'strip', side.root, plot, ahead.root, spoken.root, summary);
  root.tabIndex = 0;
  mark(root, 'aria-label', key.channel);
  mark(root, 'aria-describedby', summary.id);
  const pair: Pair = createPair(paper, key.watch !== null);
  let width = 0;
  let aheadWidth = 0;
  let painted = { from: NaN, to: NaN, changes: '' };
  let summarised = -Infinity;
  const area = () => Math.max(1, width - VALUE_ROOM);
  const perSecond = (view: StripView) => area() / view.page.look.seconds;

  return {
    key,
    root,
    plot,
    setSize: (height, plotWidth, newAheadWidth) => {
      width = plotWidth;
      aheadWidth = newAheadWidth;
      pair.setSize(plotWidth, height, root);
      painted = { from: NaN, to: NaN, changes: '' };
    },
    tell: (view, several) => {
      side.update(view.channel, view.watch, several, view.page.today);
      const [low, high] = pair.valueRange();
      side.value(newestValue(view), high - low, low < 0 && high > 0);
      mark(root, 'data-silent', view.channel.silent ? 'yes' : null);
      mark(root, 'data-zoomed', view.page.zoom === null ? null : 'yes');
      markStance(root, view);
      spoken.update(view);
      say(veil, veilText(view));
      const quiet = root.dataset.stance === 'quiet' && view.open.length === 0;
      const end = quiet ? 0 : (view.watch?.rule?.horizon ?? 0) * perSecond(view) + 14;
      const rightmost = aheadWidth - WORDS_WIDTH;
      root.style.setProperty('--words-left', `${Math.round(Math.max(16, Math.min(end, rightmost)))}px`);
      mark(root, 'data-crowded', end > rightmost && view.open.length > 0 ? 'yes' : null);
      ahead.ruleOff(perSecond(view), aheadWidth, tickStepFor(view.page.look.seconds, area()));
      if (view.page.monotonic - summarised > 5) {
        summarised = view.page.monotonic;
        say(summary, summaryText(view));
        summary.hidden = false;
      }
    },
    slide: (view) => {
      ahead.slide(view, perSecond(view));
      const perZoomed = area() / (view.to - view.from);
      const at = (ago: number) => VALUE_ROOM + area() - ago * perZoomed;
      const { readAgo, drag } = view.page;
      readingLine.hidden = readAgo === null || drag !== null;
      if (readAgo !== null) readingLine.style.transform = `translateX(${at(readAgo)}px)`;
      selection.hidden = drag === null;
      if (drag !== null) {
        selection.style.transform = `translateX(${at(drag.fromAgo)}px)`;
        selection.style.width = `${(drag.fromAgo - drag.toAgo) * perZoomed}px`;
      }
      const wanted = readAgo !== null && drag === null && root.dataset.read === 'yes';
      say(reading, wanted ? readingText(view, view.to - readAgo, perZoomed, pair.valueRange()[0] < 0) : null);
      if (wanted) mark(reading, 'data-side', readAgo * perZoomed < area() / 2 ? 'left' : 'right');
      if (wanted) reading.style.transform = `translateX(${at(readAgo)}px)`;
    },
    isDue: (view, changes) =>
      width > 0 &&
      (changes !== painted.changes ||
        Math.abs(view.to - painted.to) * perSecond(view) * devicePixelRatio >= 1),
    paint: (view, changes) => {
      painted = { from: view.from, to: view.to, changes };
      pair.draw(view, area());
    },
    agoAt: (clientX, view) => {
      const left = plot.getBoundingClientRect().left + VALUE_ROOM;
      const share = Math.min(1, Math.max(0, (clientX - left) / area()));
      return (1 - share) * (view.to - view.from);
    },
    destroy: () => pair.destroy(),
  };
}

function newestValue(view: StripView): number | null {
  const { x, y } = view.page.data.signals.get(view.channel.channel)?.points ?? { x: [], y: [] };
  for (let i = x.length - 1; i >= 0 && i >= x.length - 4; i--)
    if (y[i] !== null) return view.channel.value ?? y[i]!;
  return view.channel.value;
}

function veilText(view: StripView): string | null {
  if (view.channel.newest === null) return 'No sample has come yet.';
  const { x, y } = view.signal;
  for (let i = indexAtOrAfter(x, view.from); i < x.length && x[i]! <= view.to; i++)
    if (y[i] !== null) return null;
  return view.page.zoom === null
    ? `No sample in the last ${spanText(view.page.look.seconds)}.`
    : 'No sample in this stretch.';
}

function cssName(key: StripKey): string {
  return `${key.channel}-${key.watch ?? ''}`.replace(
    /[^A-Za-z0-9]/g,
    (sign) => `_${sign.codePointAt(0)!.toString(16)}`,
  );
}
