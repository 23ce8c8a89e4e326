import type { Contender, RehearsalResult } from '../../shared-types/rehearsal.ts';
import { place } from '../card/cardDrawing.ts';
import { element, mark } from '../dom.ts';
import { shape, svgWords } from '../svg.ts';
import { plural } from '../words.ts';
import { curveOf, nearestRow } from './operating.ts';
import { rowSentence, short } from './text.ts';
import { acrossOf, downOf, edgeFor, falseTicks, type TradeOffScale } from './tradeOffScale.ts';

const HEIGHT = 320;
const LEFT = 46;
const RIGHT = 14;
const TOP = 14;
const FOOT = 46;
/** CSS pixels under which two labels of the axis would touch. */
const LABEL = 34;

/** The trade-off curve with a point to drag. */
export interface TradeOff {
  root: HTMLElement;
  /** puts the point on a row */
  follow(row: number): void;
  /** emphasises one contender's line; null: none */
  emphasise(contender: number | null): void;
}

/** Creates the curve; `moved` runs with the row that the hand or a key has come to. */
export function createTradeOff(
  result: RehearsalResult,
  setting: { word: string; unit: string },
  moved: (row: number) => void,
): TradeOff {
  const { table, request } = result;
  const curve = curveOf(table);
  const drawing = element('div', 'tradeOff');
  const root = element('div', 'tradeOffHost', drawing);
  drawing.tabIndex = 0;
  mark(drawing, 'role', 'slider');
  mark(drawing, 'aria-label', 'Threshold');
  mark(drawing, 'aria-orientation', 'horizontal');
  mark(drawing, 'aria-valuemin', '0');
  mark(drawing, 'aria-valuemax', String(table.rows.length - 1));
  let row = result.chosenRow;
  let scale: TradeOffScale | null = null;
  let drawn: Drawn | null = null;
  let emphasised: number | null = null;
  const x = new Float64Array(curve.length).fill(NaN);
  const y = new Float64Array(curve.length).fill(NaN);

  const draw = () => {
    const width = drawing.clientWidth;
    if (width === 0) return;
    scale = {
      most: edgeFor(
        curve.map((point) => point?.falsePerHour ?? 0),
        request.ceiling.falsePerHour,
      ),
      left: LEFT,
      right: width - RIGHT,
      top: TOP,
      bottom: HEIGHT - FOOT,
    };
    curve.forEach((point, i) => {
      x[i] = point === null ? NaN : acrossOf(scale!, point.falsePerHour);
      y[i] = point === null ? NaN : downOf(scale!, point.detection);
    });
    drawn = drawCurve(result, scale, width, x, y, setting.word);
    drawing.replaceChildren(drawn.svg);
    follow(row);
    emphasise(emphasised);
  };
  const follow = (next: number) => {
    row = next;
    mark(drawing, 'aria-valuenow', String(row));
    mark(
      drawing,
      'aria-valuetext',
      rowSentence(result.settings, table.rows[row]!, setting.word, setting.unit),
    );
    if (drawn === null) return;
    const there = Number.isFinite(x[row]!);
    drawn.point.style.display = there ? '' : 'none';
    if (there) drawn.point.setAttribute('transform', `translate(${x[row]} ${y[row]})`);
  };
  const emphasise = (contender: number | null) => {
    emphasised = contender;
    drawn?.lines.forEach((line, i) => {
      mark(line, 'data-emphasised', i === contender ? 'yes' : null);
    });
  };
  const move = (next: number) => {
    const kept = Math.min(table.rows.length - 1, Math.max(0, next));
    if (kept !== row) moved(kept);
  };

  const drag = (event: PointerEvent) => {
    const box = drawing.getBoundingClientRect();
    move(nearestRow(x, y, event.clientX - box.left, event.clientY - box.top, row));
  };
  let dragging = false;
  drawing.addEventListener('pointerdown', (event) => {
    if (event.button !== 0) return;
    dragging = true;
    drawing.setPointerCapture(event.pointerId);
    drag(event);
  });
  drawing.addEventListener('pointermove', (event) => {
    if (dragging) drag(event);
  });
  for (const end of ['pointerup', 'pointercancel'])
    drawing.addEventListener(end, () => {
      dragging = false;
    });
  drawing.addEventListener('keydown', (event) => {
    const big = Math.max(1, Math.round(table.rows.length / 10));
    const step = {
      // to the right there are more false warnings: a laxer threshold
      ArrowRight: -1,
      ArrowUp: -1,
      ArrowLeft: 1,
      ArrowDown: 1,
      PageUp: -big,
      PageDown: big,
      Home: table.rows.length,
      End: -table.rows.length,
    }[event.key];
    if (step === undefined || event.ctrlKey || event.metaKey || event.altKey) return;
    event.preventDefault();
    move(row + (event.shiftKey && Math.abs(step) === 1 ? step * big : step));
  });
  new ResizeObserver(draw).observe(drawing);
  return { root, follow, emphasise };
}

interface Drawn {
  svg: SVGSVGElement;
  point: SVGElement;
  /** one line a contender */
  lines: SVGElement[];
}

function drawCurve(
  result: RehearsalResult,
  scale: TradeOffScale,
  width: number,
  x: Float64Array,
  y: Float64Array,
  word: string,
): Drawn {
  const { contenders, chosenRow, plainRow, request } = result;
  const svg = shape('svg', {
    width,
    height: HEIGHT,
    viewBox: `0 0 ${width} ${HEIGHT}`,
    'aria-hidden': 'true',
  });
  svg.append(...axes(scale, width, word));
  const ceiling = request.ceiling.falsePerHour;
  if (ceiling !== null) {
    const at = acrossOf(scale, ceiling);
    const late = at > scale.right - 90;
    svg.append(
      shape('rect', {
        class: 'beyondCeiling',
        x: at,
        y: scale.top,
        width: Math.max(0, scale.right - at),
        height: scale.bottom - scale.top,
      }),
      shape('line', { class: 'ceiling', x1: at, x2: at, y1: scale.top, y2: scale.bottom }),
      svgWords(at + (late ? -6 : 6), scale.bottom - 8, 'your ceiling', late ? 'end' : 'start'),
    );
  }
  const own = ownContender(result);
  const lines = contenders.map((contender) => {
    const kind = contender === own ? 'chosen' : contender.kind;
    const line = shape('path', {
      class: `trade ${kind}`,
      d: contender === own ? pathOf(x, y) : contenderPath(contender, scale),
    });
    svg.append(line);
    return line;
  });
  const mine = lines[contenders.indexOf(own!)];
  // the chosen variable's line lies on top of the others
  if (mine !== undefined) svg.append(mine);
  svg.append(
    ...pointMark(x[plainRow]!, y[plainRow]!, 'plainPoint', 'plain maximum', scale, plainRow === chosenRow),
  );
  svg.append(...pointMark(x[chosenRow]!, y[chosenRow]!, 'chosenPoint', 'chosen', scale, false));
  const point = shape(
    'g',
    { class: 'handPoint' },
    shape('circle', { r: 11, class: 'handHalo' }),
    shape('circle', { r: 6 }),
  );
  svg.append(point);
  return { svg, point, lines };
}

/** The contender that was chosen: the one whose curve the table is of. */
export function ownContender({ table, contenders }: RehearsalResult): Contender | undefined {
  return (
    contenders.find(({ name, kind }) => kind === 'variable' && name === table.variable) ??
    contenders.find(({ kind }) => kind === 'variable')
  );
}

function pathOf(x: Float64Array, y: Float64Array): string {
  let path = '';
  for (let i = 0; i < x.length; i++)
    if (Number.isFinite(x[i]!)) path += `${path === '' ? 'M' : 'L'}${x[i]!.toFixed(1)},${y[i]!.toFixed(1)}`;
  return path;
}

function contenderPath({ curve }: Contender, scale: TradeOffScale): string {
  return pathOf(
    Float64Array.from(curve, ({ falsePerHour }) =>
      // beyond the edge a line leaves the drawing instead of running along it
      falsePerHour > scale.most ? NaN : acrossOf(scale, falsePerHour),
    ),
    Float64Array.from(curve, ({ detection }) => downOf(scale, detection)),
  );
}

function pointMark(
  x: number,
  y: number,
  name: string,
  words: string,
  scale: TradeOffScale,
  same: boolean,
): SVGElement[] {
  if (!Number.isFinite(x) || same) return [];
  const size = 5;
  const end = x > scale.right - 100;
  const low = y < scale.top + 30;
  const sign =
    name === 'chosenPoint'
      ? shape('rect', { class: name, x: x - size, y: y - size, width: 2 * size, height: 2 * size })
      : shape('path', { class: name, d: `M${x},${y - 7}L${x + 7},${y}L${x},${y + 7}L${x - 7},${y}Z` });
  return [
    sign,
    svgWords(x + (end ? -12 : 12), y + (low ? 22 : -10), words, end ? 'end' : 'start', `${name}Words`),
  ];
}

function axes(scale: TradeOffScale, width: number, word: string): SVGElement[] {
  const { left, right, top, bottom } = scale;
  const shares = { low: 0, high: 1, from: bottom, to: top };
  return [
    shape('rect', { class: 'cardPanel', x: left, y: top, width: right - left, height: bottom - top }),
    ...[0, 0.25, 0.5, 0.75, 1].flatMap((share) => {
      const at = place(shares, share);
      return [
        shape('line', { class: 'cardRule', x1: left, x2: right, y1: at, y2: at }),
        svgWords(left - 6, at + 4, `${100 * share} %`, 'end'),
      ];
    }),
    ...falseTicks(scale, LABEL).flatMap((value) => {
      const at = acrossOf(scale, value);
      return [
        shape('line', { class: 'cardRule', x1: at, x2: at, y1: top, y2: bottom }),
        svgWords(at, bottom + 16, short(value), 'middle'),
      ];
    }),
    svgWords((left + right) / 2, bottom + 36, 'false warnings an hour (square-root scale)', 'middle'),
    svgWords(left + 6, top + 13, width < 420 ? 'warned' : `share of ${plural(word)} warned`),
  ];
}
