import type uPlot from 'uplot';
import { createPoints, type FetchedColumns, nearest, type Points, pointsOf } from '../columns.ts';
import { element, mark, say } from '../dom.ts';
import { ink, spillInk } from '../strip/ink.ts';
import { createPanel, type Panel, type PanelOptions, TIME_ROOM, VALUE_ROOM } from '../strip/panel.ts';
import { calmRange, timeStep, valueTicks } from '../strip/ticks.ts';
import { clockText, decimalsFor, numberText, spanText } from '../words.ts';
import { createSheet, momentAt, placeOn, type Sheet, sheetTicks } from './sheet.ts';

/** One line of a roll. */
export interface RollLine {
  /** what it is called and measured in, when read */
  name: () => string;
  unit: () => string;
  height: number;
  colour: () => string;
  /** drawing columns of recording `index` */
  fetch(index: number, from: number, to: number, columns: number): Promise<FetchedColumns>;
  /** columns further apart than this (s) are not joined */
  gap(from: number, to: number, columns: number): number;
  /** values that must be within the drawn range */
  include?: () => number[];
  under?: (plot: uPlot) => void;
  over?: (plot: uPlot, line: Path2D) => void;
}

export interface RollOptions {
  /** what a screen reader is told */
  label: string;
  lines: RollLine[];
  /** rooms above and below the lines, outermost first, each as high as it says, on the same scale of time */
  above?: HTMLElement[];
  below?: HTMLElement[];
  /** a stretch of the sheet was drawn over with the pointer; left out: it is looked at closely */
  stretched?: (from: number, to: number) => void;
  /** a place was clicked, or Enter pressed on it */
  activated?: (place: number) => void;
  /** the view has changed: what is on the same scale must be drawn anew */
  viewed?: () => void;
}

/** Recordings on one sheet of paper: drawn, looked at closely, read, and marked with pointer or keys. */
export interface Roll {
  root: HTMLElement;
  sheet(): Sheet;
  /** lays other recordings on the sheet, or the same ones anew */
  lay(recordings: readonly { from: number; to: number }[]): void;
  /** fetches the lines again */
  fetch(): void;
  /** draws again what is there */
  draw(): void;
  /** what is seen, in places of the sheet, and where the paper lies within the root, CSS pixels */
  view(): { from: number; to: number; left: number; width: number };
  look(from: number, to: number): void;
  whole(): void;
  /** where the reader stands on the sheet; null: nowhere */
  reader(): number | null;
  clearSelection(): void;
}

const LEAST_DRAG = 5;

/** Creates a roll without recordings. */
export function createRoll(options: RollOptions): Roll {
  let sheet = createSheet([]);
  let seen = { from: 0, to: 1 };
  let width = 0;
  let reader: number | null = null;
  let drag: { from: number; to: number } | null = null;
  let asked = 0;
  const paper = element('div', 'rollPaper');
  const selection = element('div', 'selection');
  const line = element('div', 'readingLine');
  selection.hidden = line.hidden = true;
  paper.append(...(options.above ?? []));
  const lines = options.lines.map((each, i) => createLine(each, i === options.lines.length - 1));
  for (const { host } of lines) paper.append(host);
  paper.append(...(options.below ?? []), selection, line);
  paper.tabIndex = 0;
  mark(paper, 'role', 'group');
  mark(paper, 'aria-label', options.label);
  const reading = element('p', 'rollReading');
  const back = element('button', 'quiet', 'Whole recording');
  back.type = 'button';
  const root = element('div', 'roll', paper, element('div', 'rollFoot', reading, back));

  const view = () => ({ ...seen, left: VALUE_ROOM, width: Math.max(1, width - VALUE_ROOM) });
  const whole = () => seen.from <= 0 && seen.to >= sheet.length;
  const across = (place: number) => {
    const { from, to, left, width: wide } = view();
    return left + ((place - from) / (to - from)) * wide;
  };
  const placeAt = (clientX: number): number => {
    const { from, to, left, width: wide } = view();
    const x = clientX - paper.getBoundingClientRect().left - left;
    return Math.min(to, Math.max(from, from + (x / wide) * (to - from)));
  };

  const drawAll = () => {
    if (width === 0) return;
    for (const each of lines) each.draw(sheet, seen, width);
    options.viewed?.();
    show();
  };
  const fetchAll = () => {
    const mine = ++asked;
    const columns = Math.max(200, Math.round(width * Math.min(2, devicePixelRatio)));
    const looked = { ...seen };
    for (const each of lines)
      void each.fetch(sheet, looked, columns).then((points) => {
        if (mine !== asked || points === null) return;
        each.points = points;
        drawAll();
      });
  };
  const look = (from: number, to: number) => {
    const least = sheet.length / 20_000;
    if (!(to - from > least)) return;
    seen = { from: Math.max(0, from), to: Math.min(sheet.length, to) };
    back.hidden = whole();
    drawAll();
    fetchAll();
  };
  const show = () => {
    line.hidden = reader === null;
    if (reader !== null) line.style.transform = `translateX(${across(reader)}px)`;
    selection.hidden = drag === null;
    if (drag !== null) {
      const left = across(Math.min(drag.from, drag.to));
      selection.style.transform = `translateX(${left}px)`;
      selection.style.width = `${Math.max(1, across(Math.max(drag.from, drag.to)) - left)}px`;
    }
    say(reading, reader === null ? hint() : readingAt(reader));
    reading.hidden = false;
  };
  const hint = () =>
    options.activated === undefined
      ? 'Hover or press ← → to read values; draw over a stretch to look closer or to leave it out.'
      : 'Hover or press ← → to read values; draw over a stretch to look closer; click a switch, or press Enter, to open its card.';
  const readingAt = (place: number): string => {
    const { index, time } = momentAt(sheet, place);
    if (index < 0) return '';
    const reach = (8 * (seen.to - seen.from)) / view().width;
    const values = lines.map((each, i) => {
      const { name, unit } = options.lines[i]!;
      const found = nearest(each.points, place, reach);
      const text = found === null ? 'no value' : numberText(found.value, decimalsFor(each.span()));
      return `${name()} ${text}${found === null || unit() === '' ? '' : ` ${unit()}`}`;
    });
    const decimals = seen.to - seen.from < 1800 ? 1 : 0;
    return `${clockText(time, decimals)}: ${values.join(', ')}`;
  };

  const observer = new ResizeObserver(() => {
    const next = paper.clientWidth;
    if (next === 0 || next === width) return;
    const first = width === 0;
    const grown = next > 1.3 * width;
    width = next;
    drawAll();
    if (first || grown) fetchAll();
  });
  observer.observe(paper);
  for (const query of ['(prefers-color-scheme: dark)', 'print'])
    matchMedia(query).addEventListener('change', () => {
      spillInk();
      drawAll();
    });
  back.addEventListener('click', () => {
    look(0, sheet.length);
    paper.focus();
  });
  back.hidden = true;

  listen(paper, {
    placeAt,
    read: (place) => {
      reader = place;
      show();
    },
    drag: (stretch) => {
      drag = stretch;
      show();
    },
    done: (from, to) => {
      if (options.stretched !== undefined) return options.stretched(from, to);
      drag = null;
      look(from, to);
    },
    click: (place) => options.activated?.(place),
    whole: () => look(0, sheet.length),
  });
  paper.addEventListener('keydown', (event) => {
    if (event.ctrlKey || event.metaKey || event.altKey || event.target !== paper) return;
    const span = seen.to - seen.from;
    const at = reader ?? seen.from + span / 2;
    const step = event.key === 'ArrowLeft' ? -1 : event.key === 'ArrowRight' ? 1 : 0;
    if (step !== 0) {
      const next = Math.min(sheet.length, Math.max(0, at + (step * span) / 200));
      if (event.shiftKey) {
        drag = { from: drag?.from ?? at, to: next };
        if (options.stretched !== undefined)
          options.stretched(Math.min(drag.from, next), Math.max(drag.from, next));
      }
      reader = next;
      if (next < seen.from || next > seen.to) look(next - span / 2, next + span / 2);
      show();
    } else if (event.key === 'Enter' && options.activated !== undefined) options.activated(at);
    else if (event.key === 'Enter' && drag !== null && options.stretched === undefined)
      look(Math.min(drag.from, drag.to), Math.max(drag.from, drag.to));
    else if (event.key === '+' || event.key === '=') look(at - span / 4, at + span / 4);
    else if (event.key === '-' || event.key === '−') look(at - span, at + span);
    else if (event.key === 'Escape') {
      drag = null;
      look(0, sheet.length);
    } else return;
    event.preventDefault();
  });

  return {
    root,
    sheet: () => sheet,
    lay: (recordings) => {
      sheet = createSheet(recordings);
      seen = { from: 0, to: Math.max(1e-9, sheet.length) };
      reader = drag = null;
      back.hidden = true;
      for (const each of lines) each.points = createPoints();
      drawAll();
      if (width > 0) fetchAll();
    },
    fetch: fetchAll,
    draw: drawAll,
    view,
    look,
    whole: () => look(0, sheet.length),
    reader: () => reader,
    clearSelection: () => {
      drag = null;
      show();
    },
  };
}

interface Drawn {
  host: HTMLElement;
  points: Points;
  span(): number;
  draw(sheet: Sheet, seen: { from: number; to: number }, width: number): void;
  fetch(sheet: Sheet, seen: { from: number; to: number }, columns: number): Promise<Points | null>;
}

function createLine(options: RollLine, last: boolean): Drawn {
  const host = element('div', 'panel');
  let sheet = createSheet([]);
  let width = 0;
  let range: [number, number] | null = null;
  const panelOptions: PanelOptions = {
    above: 4,
    below: 4,
    timeLabels: last,
    colour: options.colour,
    labelColour: () => ink().inkSoft,
    valueGrid: true,
    width: 1.3,
    range: (low, high) => {
      const wanted = options.include?.() ?? [];
      const all = [...(low === null || high === null ? [] : [low, high]), ...wanted];
      range = all.length === 0 ? [0, 1] : calmRange(range, Math.min(...all), Math.max(...all));
      return range;
    },
    valueTicks: (low, high) => valueTicks(low, high, options.height < 120),
    valueLabels: (ticks) => {
      const decimals = Math.max(0, ...ticks.map((tick) => (String(tick).split('.')[1] ?? '').length));
      return ticks.map((tick) => numberText(tick, Math.min(6, decimals)));
    },
    timeTicks: (from, to) => sheetTicks(sheet, from, to, stepFor(from, to, width)).map(({ place }) => place),
    timeLabelsOf: (ticks) => labelsOf(sheet, ticks),
    under: (plot) => options.under?.(plot),
    over: (plot, path) => options.over?.(plot, path),
  };
  let panel: Panel | null = null;
  const drawn: Drawn = {
    host,
    points: createPoints(),
    span: () => (range === null ? 1 : range[1] - range[0]),
    draw: (next, seen, newWidth) => {
      sheet = next;
      width = newWidth;
      panel ??= createPanel(host, panelOptions);
      panel.setSize(width, options.height + (last ? TIME_ROOM : 0));
      panel.draw(drawn.points, seen.from, seen.to);
    },
    fetch: async (on, seen, columns) => {
      const parts = await Promise.all(
        on.pieces.map(async (piece, index) => {
          const from = Math.max(piece.from, piece.from + (seen.from - piece.start));
          const to = Math.min(piece.to, piece.from + (seen.to - piece.start));
          if (!(to > from)) return null;
          const share = Math.max(20, Math.round((columns * (to - from)) / (seen.to - seen.from)));
          const margin = 0.01 * (to - from);
          const fetched = await options.fetch(index, from - margin, to + margin, share).catch(() => null);
          if (fetched === null) return null;
          const points = pointsOf(fetched, options.gap(from, to, share));
          return { x: points.x.map((time) => placeOn(on, index, time)), y: points.y };
        }),
      );
      const there = parts.filter((part) => part !== null);
      return there.length === 0 ? null : joined(there);
    },
  };
  return drawn;
}

/** Lines of several recordings as one, broken between them. */
function joined(parts: Points[]): Points {
  const all = createPoints();
  for (const { x, y } of parts) {
    const end = all.x.at(-1);
    const first = x.findIndex((place) => end === undefined || place > end);
    if (first < 0) continue;
    if (end !== undefined) {
      all.x.push(end + (x[first]! - end) / 2);
      all.y.push(null);
    }
    all.x.push(...x.slice(first));
    all.y.push(...y.slice(first));
  }
  return all;
}

const stepFor = (from: number, to: number, width: number): number =>
  timeStep(to - from, Math.max(2, Math.floor(width / (width < 500 ? 90 : 120))));

function labelsOf(sheet: Sheet, places: number[]): string[] {
  const times = places.map((place) => Math.round(1e6 * momentAt(sheet, place).time) / 1e6);
  const whole = times.every((time) => Math.abs(time % 60) < 1e-6);
  const decimals = times.every((time) => Number.isInteger(time)) ? 0 : 1;
  return times.map((time) => {
    const text = clockText(time, whole ? 0 : decimals).replace(' elapsed', '');
    return whole && time >= 1e8 ? text.slice(0, 5) : text;
  });
}

interface Hand {
  placeAt(clientX: number): number;
  read(place: number | null): void;
  drag(stretch: { from: number; to: number } | null): void;
  done(from: number, to: number): void;
  click(place: number): void;
  whole(): void;
}

function listen(paper: HTMLElement, hand: Hand): void {
  let began: { x: number; place: number } | null = null;
  let far = false;
  paper.addEventListener('pointermove', (event) => {
    const place = hand.placeAt(event.clientX);
    hand.read(place);
    if (began === null) return;
    far ||= Math.abs(event.clientX - began.x) >= LEAST_DRAG;
    if (far) hand.drag({ from: began.place, to: place });
  });
  paper.addEventListener('pointerdown', (event) => {
    if (event.button !== 0 || (event.target as Element).closest('button')) return;
    began = { x: event.clientX, place: hand.placeAt(event.clientX) };
    far = false;
    if (event.pointerType !== 'touch') paper.setPointerCapture(event.pointerId);
  });
  const end = (event: PointerEvent) => {
    if (began === null) return;
    const { place } = began;
    began = null;
    if (event.type === 'pointercancel') return hand.drag(null);
    const now = hand.placeAt(event.clientX);
    if (far) hand.done(Math.min(place, now), Math.max(place, now));
    else hand.click(now);
  };
  paper.addEventListener('pointerup', end);
  paper.addEventListener('pointercancel', end);
  paper.addEventListener('pointerleave', () => {
    if (began === null) hand.read(null);
  });
  paper.addEventListener('dblclick', () => hand.whole());
}

/** "14:02:10 to 14:05:00, 2 min 50 s" of a stretch of the sheet. */
export function stretchText(sheet: Sheet, from: number, to: number): string {
  const begin = momentAt(sheet, from).time;
  const end = momentAt(sheet, to).time;
  return `${clockText(begin, 1)} to ${clockText(end, 1)}, ${spanText(end - begin)}`;
}
