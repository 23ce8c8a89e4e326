import type uPlot from 'uplot';
import type { Stretch } from '../regimes.ts';
import { HATCH_TILE, ink } from './ink.ts';

/** Device-pixel position of a time in a plot. */
export function acrossOf(plot: uPlot, time: number): number {
  return plot.valToPos(time, 'x', true);
}

/** Hatches stretches of time over the whole height; the hatch travels with the paper. */
export function hatchStretches(plot: uPlot, stretches: readonly Stretch[]): void {
  const { ctx, bbox } = plot;
  const { hatch } = ink();
  if (typeof hatch !== 'string') {
    const { min, max } = plot.scales.x!;
    const perSecond = bbox.width / (max! - min!);
    const size = Math.round(HATCH_TILE * devicePixelRatio);
    hatch.setTransform(new DOMMatrix([1, 0, 0, 1, bbox.left - Math.round((min! * perSecond) % size), 0]));
  }
  ctx.fillStyle = hatch;
  for (const { from, to } of stretches) {
    const left = Math.max(bbox.left, Math.round(acrossOf(plot, from)));
    const right = Math.min(bbox.left + bbox.width, Math.round(acrossOf(plot, to)));
    if (right > left) ctx.fillRect(left, bbox.top, right - left, bbox.height);
  }
}

/** Wedges on the upper edge, pointing down, one a time. */
export function wedges(plot: uPlot, times: readonly number[]): void {
  triangles(plot, times, plot.bbox.top - 1.5 * devicePixelRatio, -1, ink().ink, true);
}

/** Carets on the lower edge, pointing up, one a time; hollow ones for warnings that came too late to speak. */
export function carets(plot: uPlot, times: readonly number[], filled: boolean): void {
  triangles(plot, times, plot.bbox.top + plot.bbox.height + 2.5 * devicePixelRatio, 1, ink().red, filled);
}

function triangles(
  plot: uPlot,
  times: readonly number[],
  tip: number,
  way: 1 | -1,
  colour: string,
  filled: boolean,
): void {
  const { ctx, bbox } = plot;
  const side = 5 * devicePixelRatio;
  const tall = 8 * devicePixelRatio * way;
  ctx.beginPath();
  for (const time of times) {
    const x = acrossOf(plot, time);
    if (x < bbox.left - 1 || x > bbox.left + bbox.width + 1) continue;
    ctx.moveTo(x, tip);
    ctx.lineTo(x + side, tip + tall);
    ctx.lineTo(x - side, tip + tall);
    ctx.closePath();
  }
  ctx.fillStyle = ctx.strokeStyle = colour;
  ctx.lineWidth = devicePixelRatio;
  if (filled) ctx.fill();
  else ctx.stroke();
}

/** A dashed level across the panel. */
export function dashedLevel(plot: uPlot, value: number, colour: string, dash: [number, number]): void {
  const { ctx, bbox } = plot;
  const y = Math.round(plot.valToPos(value, 'y', true)) + 0.5 * (Math.round(devicePixelRatio) % 2);
  if (y < bbox.top || y > bbox.top + bbox.height) return;
  ctx.beginPath();
  ctx.setLineDash(dash.map((length) => length * devicePixelRatio));
  ctx.moveTo(bbox.left, y);
  ctx.lineTo(bbox.left + bbox.width, y);
  ctx.strokeStyle = colour;
  ctx.lineWidth = devicePixelRatio;
  ctx.stroke();
  ctx.setLineDash([]);
}

/** Draws the part of a line beyond a level once more, red and thicker. */
export function beyondLevel(plot: uPlot, line: Path2D, level: number, above: boolean): void {
  const { ctx, bbox } = plot;
  const y = plot.valToPos(level, 'y', true);
  const top = above ? bbox.top - 4 : y;
  const bottom = above ? y : bbox.top + bbox.height + 4;
  if (bottom <= top) return;
  ctx.save();
  ctx.beginPath();
  ctx.rect(bbox.left, top, bbox.width, bottom - top);
  ctx.clip();
  ctx.strokeStyle = ink().red;
  ctx.lineWidth = 2.6 * devicePixelRatio;
  ctx.lineJoin = 'round';
  ctx.stroke(line);
  ctx.restore();
}
