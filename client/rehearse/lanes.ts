import type { SwitchOutcome, WarningOutcome } from '../../shared-types/warning.ts';
import { element, say } from '../dom.ts';
import { ink } from '../strip/ink.ts';
import type { Lane } from './operating.ts';

/** How an outcome is drawn: pointing down for switches, up for warnings; full, half, hollow or a bar. */
export interface LaneSign {
  words: string;
  fill: 'full' | 'half' | 'hollow' | 'bar';
  red: boolean;
}

/** Signs of the switches, by what became of them. */
export const SWITCH_SIGNS: Record<SwitchOutcome, LaneSign> = {
  warned: { words: 'warned', fill: 'full', red: false },
  late: { words: 'warned too late', fill: 'half', red: false },
  missed: { words: 'missed', fill: 'hollow', red: false },
  blind: { words: 'window not full', fill: 'bar', red: false },
  pending: { words: 'not known', fill: 'bar', red: false },
};

/** Signs of the warnings, by what became of them. */
export const WARNING_SIGNS: Record<WarningOutcome, LaneSign> = {
  true: { words: 'came true', fill: 'full', red: true },
  repeat: { words: 'repeat', fill: 'bar', red: true },
  late: { words: 'too late', fill: 'half', red: true },
  false: { words: 'did not', fill: 'hollow', red: true },
  open: { words: 'open at the end', fill: 'bar', red: true },
  unseen: { words: 'unseen', fill: 'bar', red: true },
  acted: { words: 'acted on', fill: 'bar', red: true },
};

/** Height of a lane, CSS pixels. */
export const LANE = 17;

/** Lanes of marks on a roll's scale of time, one an outcome, each with its words and its count at the left. */
export interface Lanes<O extends string> {
  root: HTMLElement;
  draw(
    lanes: readonly Lane<O>[],
    view: { from: number; to: number; left: number; width: number },
    chosen: number | null,
  ): void;
}

/** Creates lanes; `way`: the marks point down (switches) or up (warnings). */
export function createLanes<O extends string>(
  outcomes: readonly O[],
  signs: Record<O, LaneSign>,
  way: 'down' | 'up',
): Lanes<O> {
  const canvas = element('canvas', 'lanesPaper');
  const names = outcomes.map((outcome) => {
    const count = element('b', '');
    const name = element('span', 'laneName', `${signs[outcome].words} `, count);
    return { name, count };
  });
  const root = element('div', `lanes ${way}`, canvas, ...names.map(({ name }) => name));
  root.style.height = `${LANE * outcomes.length}px`;
  names.forEach(({ name }, i) => {
    name.style.top = `${LANE * i}px`;
  });
  return {
    root,
    draw: (lanes, view, chosen) => {
      const ratio = devicePixelRatio;
      const width = Math.round((view.left + view.width) * ratio);
      const height = Math.round(LANE * outcomes.length * ratio);
      if (canvas.width !== width || canvas.height !== height) {
        canvas.width = width;
        canvas.height = height;
      }
      const context = canvas.getContext('2d');
      if (context === null) return;
      context.clearRect(0, 0, width, height);
      const { rule, red, ink: dark } = ink();
      lanes.forEach((lane, i) => {
        say(names[i]!.count, String(lane.count));
        const middle = (LANE * (i + 0.5) + (way === 'down' ? -0.5 : 0.5)) * ratio;
        context.fillStyle = rule;
        context.fillRect(view.left * ratio, Math.round(LANE * (i + 1) * ratio) - 1, view.width * ratio, 1);
        marks(
          context,
          lane.places,
          view,
          middle,
          signs[lane.outcome],
          way,
          signs[lane.outcome].red ? red : dark,
        );
      });
      if (chosen !== null) ring(context, chosen, view, height, dark);
    },
  };
}

function marks(
  context: CanvasRenderingContext2D,
  places: Float64Array,
  { from, to, left, width }: { from: number; to: number; left: number; width: number },
  middle: number,
  sign: LaneSign,
  way: 'down' | 'up',
  colour: string,
): void {
  const ratio = devicePixelRatio;
  const side = 4 * ratio;
  const tall = (way === 'down' ? 4 : -4) * ratio;
  const across = (width * ratio) / (to - from);
  const full = new Path2D();
  const outline = new Path2D();
  let last = -Infinity;
  for (let i = 0; i < places.length; i++) {
    const place = places[i]!;
    if (place < from || place > to) continue;
    const x = left * ratio + (place - from) * across;
    // marks closer than half a pixel are one mark
    if (Math.abs(x - last) < 0.5 * ratio) continue;
    last = x;
    if (sign.fill === 'bar') full.rect(x - 0.75 * ratio, middle - 4 * ratio, 1.5 * ratio, 8 * ratio);
    else {
      const path = sign.fill === 'full' ? full : outline;
      path.moveTo(x, middle + tall);
      path.lineTo(x + side, middle - tall);
      path.lineTo(x - side, middle - tall);
      path.closePath();
      if (sign.fill === 'half') {
        full.moveTo(x, middle + tall);
        full.lineTo(x, middle - tall);
        full.lineTo(x - side, middle - tall);
        full.closePath();
      }
    }
  }
  context.fillStyle = context.strokeStyle = colour;
  context.lineWidth = 1.2 * ratio;
  context.fill(full);
  context.stroke(outline);
}

function ring(
  context: CanvasRenderingContext2D,
  place: number,
  { from, to, left, width }: { from: number; to: number; left: number; width: number },
  height: number,
  colour: string,
): void {
  if (place < from || place > to) return;
  const ratio = devicePixelRatio;
  const x = (left + ((place - from) / (to - from)) * width) * ratio;
  context.strokeStyle = colour;
  context.lineWidth = 1.5 * ratio;
  context.strokeRect(x - 7 * ratio, 1, 14 * ratio, height - 2);
}
