import type uPlot from 'uplot';
import { ink } from '../strip/ink.ts';
import { acrossOf } from '../strip/marks.ts';
import { type Sheet, stretchesOn } from './sheet.ts';

/** Draws a veil over what is left out: the paper shows through, dotted edges, and the reason where there is room for it. */
export function leftOutVeil(
  plot: uPlot,
  sheet: Sheet,
  stretches: readonly { from: number; to: number; why: string }[],
): void {
  const { ctx, bbox } = plot;
  const paper = getComputedStyle(document.documentElement).getPropertyValue('--paper').trim();
  for (const stretch of stretches)
    for (const { from, to } of stretchesOn(sheet, stretch)) {
      const left = Math.max(bbox.left, Math.round(acrossOf(plot, from)));
      const right = Math.min(bbox.left + bbox.width, Math.round(acrossOf(plot, to)));
      if (right <= left) continue;
      ctx.globalAlpha = 0.78;
      ctx.fillStyle = paper;
      ctx.fillRect(left, bbox.top, right - left, bbox.height);
      ctx.globalAlpha = 1;
      ctx.strokeStyle = ink().inkSoft;
      ctx.lineWidth = devicePixelRatio;
      ctx.setLineDash([devicePixelRatio, 3 * devicePixelRatio]);
      ctx.strokeRect(left + 0.5, bbox.top + 0.5, right - left - 1, bbox.height - 1);
      ctx.setLineDash([]);
      word(plot, `left out: ${stretch.why}`, left, right);
    }
}

function word({ ctx, bbox }: uPlot, text: string, left: number, right: number): void {
  ctx.font = ink().font.replace(/(\d+)px/, (_, size) => `${Number(size) * devicePixelRatio}px`);
  ctx.textAlign = 'left';
  ctx.textBaseline = 'top';
  if (ctx.measureText(text).width + 10 * devicePixelRatio > right - left) return;
  ctx.fillStyle = ink().inkSoft;
  ctx.fillText(text, left + 5 * devicePixelRatio, bbox.top + 4 * devicePixelRatio);
}
