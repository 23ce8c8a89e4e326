import type { MeasuredDelay } from '../../shared-types/delivery.ts';
import { shape, svgWords } from '../svg.ts';
import { spanText } from '../words.ts';
import { delayText } from './words.ts';

const WIDTH = 560;
const LEFT = 2;
const LANE = 26;
const NAMES = ['rig', 'network', 'program', 'delivery'] as const;

/** A stretch of a lane, as shares of the lane's width. */
export interface Stretch {
  name: (typeof NAMES)[number];
  from: number;
  to: number;
}

/**
 * The parts of a delay one behind the other.
 *
 * @param whole seconds the lane stands for; what reaches beyond is cut
 */
export function stretches(delay: MeasuredDelay, whole: number): Stretch[] {
  let at = 0;
  return NAMES.map((name) => {
    const from = at;
    at += delay[name].seconds ?? 0;
    return { name, from: Math.min(1, from / whole), to: Math.min(1, at / whole) };
  });
}

function lane(y: number, delay: MeasuredDelay, whole: number): SVGElement[] {
  const width = WIDTH - 2 * LEFT;
  return [
    shape('rect', { class: 'leadLane', x: LEFT, y, width, height: LANE }),
    ...stretches(delay, whole)
      .filter(({ from, to }) => to > from)
      .map(({ name, from, to }) =>
        shape('rect', {
          class: `delayOf ${name}`,
          x: (LEFT + from * width).toFixed(1),
          y,
          // the least of them stays to be seen
          width: Math.max(1.5, (to - from) * width).toFixed(1),
          height: LANE,
        }),
      ),
  ];
}

/** Words below the stretches that have room for them. */
function names(y: number, delay: MeasuredDelay, whole: number): SVGElement[] {
  const width = WIDTH - 2 * LEFT;
  return stretches(delay, whole)
    .filter(({ name, from, to }) => (to - from) * width > 8 * name.length)
    .map(({ name, from, to }) => svgWords(LEFT + 0.5 * (from + to) * width, y, name, 'middle'));
}

/** The least lead as a lane with the delay at its beginning, and the delay alone, as wide, below it. */
export function drawDelay(delay: MeasuredDelay): SVGSVGElement {
  const { total, leastLead, left } = delay;
  const drawing = shape('svg', {
    class: 'delayDrawing',
    viewBox: `0 0 ${WIDTH} ${leastLead === null ? 66 : 132}`,
    role: 'img',
    'aria-label': `the delay of ${delayText(total)} and its parts${leastLead === null ? '' : `, beside the least lead of ${spanText(leastLead)}`}`,
  });
  let y = 16;
  if (leastLead !== null && left !== null) {
    const whole = Math.max(leastLead, total);
    const width = WIDTH - 2 * LEFT;
    const end = LEFT + (Math.min(total, whole) / whole) * width;
    drawing.append(svgWords(LEFT, y - 5, `the least lead, ${spanText(leastLead)}`), ...lane(y, delay, whole));
    if (left > 0 && WIDTH - end > 110)
      drawing.append(svgWords(0.5 * (end + WIDTH), y + 17, `${delayText(left)} for you`, 'middle', 'forYou'));
    // from the delay's end to the whole width of the lane below
    drawing.append(
      shape('path', {
        class: 'opens',
        d: `M${LEFT} ${y + LANE}V${y + 66}M${end.toFixed(1)} ${y + LANE}L${WIDTH - LEFT} ${y + 66}`,
      }),
    );
    y += 66;
  }
  if (total > 0) drawing.append(...lane(y, delay, total), ...names(y + LANE + 14, delay, total));
  return drawing;
}
