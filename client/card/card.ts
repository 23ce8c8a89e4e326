import type { SwitchCard } from '../../shared-types/rehearsal.ts';
import { element, mark, say } from '../dom.ts';
import { valueTicks } from '../strip/ticks.ts';
import { decimalsFor, numberText } from '../words.ts';
import {
  cardSpan,
  nearestIndex,
  pathOf,
  place,
  rangeOf,
  type Scale,
  secondsTicks,
  valueAt,
} from './cardDrawing.ts';
import { type CardSetting, cardTitle, catchingSentence, momentText, outcomeSentence } from './cardWords.ts';

const SVG = 'http://www.w3.org/2000/svg';
const LEFT = 46;
const RIGHT = 12;
const TOP = 16;
const SIGNAL = 110;
const APART = 14;
const VALUE = 84;
const FOOT = 34;
const HEIGHT = TOP + SIGNAL + APART + VALUE + FOOT;

/**
 * The card of a switch: in words whether and when it was warned and which threshold would have caught it, and its last
 * moments drawn. It draws itself anew whenever its width changes.
 */
export function createCard(card: SwitchCard, about: Partial<CardSetting> = {}): HTMLElement {
  const setting = { unit: '', switchWord: 'switch', ...about };
  const paper = element('div', 'cardPaper');
  const reading = element('p', 'cardReading');
  const hint = hintOf(card);
  say(reading, hint);
  const drawing = element('div', 'cardDrawing', paper);
  drawing.tabIndex = 0;
  mark(drawing, 'role', 'img');
  mark(
    drawing,
    'aria-label',
    `${card.channel} and its ${card.variable} before the switch. ${outcomeSentence(card)}`,
  );
  const root = element(
    'figure',
    'card',
    element(
      'figcaption',
      '',
      element('h3', '', cardTitle(card, setting)),
      element('p', 'cardOutcome', outcomeSentence(card)),
      element('p', '', catchingSentence(card, setting)),
    ),
    drawing,
    reading,
  );
  mark(root, 'data-outcome', card.outcome);
  if (card.t.length === 0) {
    drawing.hidden = true;
    say(reading, 'No samples are stored around it, so there is nothing to draw.');
    return root;
  }
  let chosen: number | null = null;
  let drawn: Drawn | null = null;
  const choose = (index: number | null) => {
    chosen = index;
    say(reading, index === null ? hint : readingText(card, index, setting));
    if (drawn === null) return;
    mark(drawn.reader, 'visibility', index === null ? 'hidden' : null);
    if (index !== null)
      mark(drawn.reader, 'transform', `translate(${place(drawn.x, card.t[index]! - card.at).toFixed(1)} 0)`);
  };
  const redraw = () => {
    const width = Math.max(240, Math.floor(paper.clientWidth));
    if (drawn?.width === width) return;
    drawn = drawCard(card, width, setting);
    paper.replaceChildren(drawn.svg);
    choose(chosen);
  };
  new ResizeObserver(redraw).observe(paper);
  drawing.addEventListener('pointermove', (event) => {
    if (drawn === null) return;
    const pixel = event.clientX - paper.getBoundingClientRect().left;
    choose(nearestIndex(card.t, card.at + valueAt(drawn.x, pixel)));
  });
  drawing.addEventListener('pointerleave', () => choose(null));
  drawing.addEventListener('blur', () => choose(null));
  drawing.addEventListener('keydown', (event) => {
    const by = { ArrowLeft: -1, ArrowRight: 1 }[event.key];
    if (by === undefined || event.ctrlKey || event.metaKey || event.altKey) return;
    event.preventDefault();
    event.stopPropagation();
    const stride = Math.max(1, Math.round(card.t.length / (event.shiftKey ? 20 : 180)));
    const from = chosen ?? nearestIndex(card.t, card.at);
    choose(Math.min(card.t.length - 1, Math.max(0, from + by * stride)));
  });
  return root;
}

function hintOf({ catching, threshold }: SwitchCard): string {
  const other =
    catching === null || catching.threshold === threshold
      ? ''
      : '; dotted: the one that would have caught it';
  return `Hatched: where a warning is in time. Dashed: the threshold in use${other}. Hover or press ← → to read values.`;
}

function readingText(card: SwitchCard, index: number, { unit }: CardSetting): string {
  const signal = card.signal[index]!;
  const value = card.value[index]!;
  const [low, high] = rangeOf(card.signal);
  const unitText = unit === '' ? '' : ` ${unit}`;
  const signalText = Number.isNaN(signal)
    ? 'no value'
    : numberText(signal, decimalsFor(high - low)) + unitText;
  const valueText = Number.isNaN(value)
    ? 'blind'
    : `${numberText(value, 2)}${card.variable === 'forcing' ? ' sd' : unitText}`;
  return `${momentText(card.t[index]! - card.at)}: ${card.channel} ${signalText}, ${card.variable} ${valueText}`;
}

interface Drawn {
  svg: SVGSVGElement;
  x: Scale;
  width: number;
  reader: SVGElement;
}

function drawCard(card: SwitchCard, width: number, { unit }: CardSetting): Drawn {
  const [from, to] = cardSpan(card);
  const x: Scale = { low: from, high: to, from: LEFT, to: width - RIGHT };
  const [signalLow, signalHigh] = rangeOf(card.signal);
  const signal: Scale = { low: signalLow, high: signalHigh, from: TOP + SIGNAL, to: TOP };
  const lower = TOP + SIGNAL + APART;
  const [valueLow, valueHigh] = rangeOf(card.value, thresholdsOf(card));
  const value: Scale = { low: valueLow, high: valueHigh, from: lower + VALUE, to: lower };
  const svg = shape('svg', {
    width,
    height: HEIGHT,
    viewBox: `0 0 ${width} ${HEIGHT}`,
    'aria-hidden': 'true',
  });
  const reader = shape('line', { class: 'cardReader', x1: 0, x2: 0, y1: TOP, y2: lower + VALUE });
  const times = Float64Array.from(card.t, (time) => time - card.at);
  const inTime = { x: place(x, -card.horizon), to: place(x, -card.leastLead) };
  const hatch = `cardHatch${++hatches}`;
  svg.append(
    hatchPattern(hatch),
    shape('rect', { class: 'cardPanel', x: LEFT, y: TOP, width: width - LEFT - RIGHT, height: SIGNAL }),
    shape('rect', { class: 'cardPanel', x: LEFT, y: lower, width: width - LEFT - RIGHT, height: VALUE }),
    shape('rect', {
      x: inTime.x,
      y: lower,
      width: Math.max(0, inTime.to - inTime.x),
      height: VALUE,
      fill: `url(#${hatch})`,
    }),
    ...timeAxis(x, lower + VALUE, width),
    ...valueAxis(signal, width, unit),
    ...valueAxis(value, width, card.variable === 'forcing' ? 'sd' : unit, true),
    shape('path', { class: 'cardLine', d: pathOf(times, card.signal, x, signal) }),
    shape('path', { class: 'cardLine pen', d: pathOf(times, card.value, x, value) }),
    level('cardThreshold', card.threshold, value, width),
    ...(card.catching === null || card.catching.threshold === card.threshold
      ? []
      : [level('cardCatching', card.catching.threshold, value, width)]),
    shape('line', { class: 'cardSwitch', x1: place(x, 0), x2: place(x, 0), y1: TOP, y2: lower + VALUE }),
    shape('path', { class: 'cardWedge', d: triangle(place(x, 0), TOP - 10, 10) }),
    ...caret(card, x, lower + VALUE),
    reader,
  );
  return { svg, x, width, reader };
}

let hatches = 0;

function thresholdsOf(card: SwitchCard): number[] {
  return card.catching === null ? [card.threshold] : [card.threshold, card.catching.threshold];
}

function timeAxis(x: Scale, foot: number, width: number): SVGElement[] {
  const ticks = secondsTicks(x.low, x.high, x.to - x.from);
  const decimals = ticks.some((tick) => !Number.isInteger(tick)) ? 1 : 0;
  const axis = ticks.flatMap((tick) => {
    const at = place(x, tick);
    if (at > width - RIGHT - 4 && tick !== 0) return [];
    return [
      shape('line', { class: 'cardRule', x1: at, x2: at, y1: TOP, y2: foot }),
      words(at, foot + 14, tick === 0 ? '0' : numberText(tick, decimals), 'middle'),
    ];
  });
  return [...axis, words((x.from + x.to) / 2, foot + 28, 'seconds from the switch', 'middle')];
}

function valueAxis(y: Scale, width: number, unit: string, few = false): SVGElement[] {
  const ticks = valueTicks(y.low, y.high, few);
  const decimals = Math.max(0, ...ticks.map((tick) => (String(tick).split('.')[1] ?? '').length));
  const axis = ticks.flatMap((tick) => {
    const at = place(y, tick);
    return [
      shape('line', { class: 'cardRule', x1: LEFT, x2: width - RIGHT, y1: at, y2: at }),
      words(LEFT - 5, at + 3.5, numberText(tick, Math.min(6, decimals)), 'end'),
    ];
  });
  return unit === '' ? axis : [...axis, words(LEFT + 5, y.to + 11, unit, 'start')];
}

function level(name: string, at: number, y: Scale, width: number): SVGElement {
  const height = place(y, at);
  return shape('line', { class: name, x1: LEFT, x2: width - RIGHT, y1: height, y2: height });
}

function caret(card: SwitchCard, x: Scale, foot: number): SVGElement[] {
  if (card.warnedAt === null) return [];
  const at = place(x, card.warnedAt - card.at);
  return [
    shape('line', { class: 'cardWarning', x1: at, x2: at, y1: TOP + SIGNAL + APART, y2: foot }),
    shape('path', { class: 'cardCaret', d: `M${at - 5},${foot}L${at + 5},${foot}L${at},${foot - 9}Z` }),
  ];
}

const triangle = (at: number, top: number, size: number) =>
  `M${at - size / 2},${top}L${at + size / 2},${top}L${at},${top + size}Z`;

function hatchPattern(id: string): SVGElement {
  const pattern = shape('pattern', {
    id,
    width: 7,
    height: 7,
    patternUnits: 'userSpaceOnUse',
    patternTransform: 'rotate(45)',
  });
  pattern.append(shape('line', { class: 'cardHatch', x1: 0, x2: 0, y1: 0, y2: 7 }));
  return pattern;
}

function words(x: number, y: number, text: string, anchor: string): SVGElement {
  const made = shape('text', { x: x.toFixed(1), y: y.toFixed(1), 'text-anchor': anchor });
  made.textContent = text;
  return made;
}

function shape<K extends keyof SVGElementTagNameMap>(
  tag: K,
  attributes: Record<string, string | number>,
): SVGElementTagNameMap[K] {
  const made = document.createElementNS(SVG, tag);
  for (const [name, value] of Object.entries(attributes)) made.setAttribute(name, String(value));
  return made;
}
