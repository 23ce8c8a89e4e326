import uPlot from 'uplot';
import type { Points } from '../columns.ts';
import { ink } from './ink.ts';

/** Room above the signal for the wedges, and below the trace for the carets, CSS pixels. */
export const WEDGE_ROOM = 14;
export const CARET_ROOM = 13;
/** Width of the value labels left of a panel, height of the time labels below the lowest one, CSS pixels. */
export const VALUE_ROOM = 56;
export const TIME_ROOM = 22;

export interface PanelOptions {
  /** free room in the canvas above and below the plotting area, CSS pixels */
  above: number;
  below: number;
  /** times are labelled below the panel */
  timeLabels: boolean;
  colour: () => string;
  /** colour of the value labels, and whether a rule is drawn at each */
  labelColour: () => string;
  valueGrid: boolean;
  width: number;
  /** the vertical range for the least and greatest visible value */
  range: (low: number | null, high: number | null) => [number, number];
  valueTicks: (low: number, high: number) => number[];
  valueLabels: (ticks: number[]) => string[];
  timeTicks: (from: number, to: number) => number[];
  timeLabelsOf: (ticks: number[]) => string[];
  /** draws under and over the line, in device pixels */
  under: (plot: uPlot) => void;
  over: (plot: uPlot, line: Path2D) => void;
}

/** One uPlot instance of a strip. */
export interface Panel {
  setSize(width: number, height: number): void;
  draw(points: Points, from: number, to: number): void;
  destroy(): void;
}

/** Creates a panel in `host`; nothing is drawn before its first `draw`. */
export function createPanel(host: HTMLElement, options: PanelOptions): Panel {
  let line = new Path2D();
  const plot = new uPlot(
    uPlotOptions(
      options,
      (path) => (line = path),
      () => line,
    ),
    [[], []],
    host,
  );
  return {
    setSize: (width, height) => {
      if (plot.width !== width || plot.height !== height) plot.setSize({ width, height });
    },
    draw: (points, from, to) =>
      plot.batch(() => {
        plot.setData([points.x, points.y], false);
        plot.setScale('x', { min: from, max: to });
      }),
    destroy: () => plot.destroy(),
  };
}

function uPlotOptions(
  options: PanelOptions,
  keep: (path: Path2D) => void,
  kept: () => Path2D,
): uPlot.Options {
  const grid = { stroke: () => ink().rule, width: 1 };
  return {
    width: 600,
    height: 120,
    padding: [options.above, 0, options.timeLabels ? 0 : options.below, 0],
    cursor: { show: false },
    legend: { show: false },
    select: { show: false, left: 0, top: 0, width: 0, height: 0 },
    scales: { x: { time: false }, y: { range: (_plot, low, high) => options.range(low, high) } },
    axes: [
      {
        size: options.timeLabels ? TIME_ROOM + options.below : 0,
        gap: options.timeLabels ? options.below : 0,
        font: ink().font,
        stroke: () => ink().inkSoft,
        splits: (_plot, _axis, from, to) => options.timeTicks(from, to),
        values: (_plot, ticks) => (options.timeLabels ? options.timeLabelsOf(ticks) : ticks.map(() => '')),
        grid,
        ticks: { show: false },
      },
      {
        size: VALUE_ROOM,
        gap: 8,
        font: ink().font,
        stroke: () => options.labelColour(),
        splits: (_plot, _axis, low, high) => options.valueTicks(low, high),
        values: (_plot, ticks) => options.valueLabels(ticks),
        grid: { ...grid, show: options.valueGrid },
        ticks: { show: false },
      },
    ],
    series: [
      {},
      {
        stroke: () => options.colour(),
        width: options.width,
        // a lone sample between two gaps is a dot, not nothing
        cap: 'round',
        points: { show: false },
        paths: (plot, _series, first, last) => {
          const path = linePath(plot, first, last);
          keep(path);
          return { stroke: path };
        },
      },
    ],
    hooks: {
      drawClear: [(plot) => options.under(plot)],
      draw: [(plot) => clipped(plot, () => options.over(plot, kept()))],
    },
  };
}

function clipped(plot: uPlot, draw: () => void): void {
  plot.ctx.save();
  draw();
  plot.ctx.restore();
}

/**
 * The line through the points from index `first` to `last`, in device pixels, broken at null. Within one pixel
 * column only where the line enters, its extremes and where it leaves are drawn.
 */
function linePath(plot: uPlot, first: number, last: number): Path2D {
  const path = new Path2D();
  const xs = plot.data[0] as number[];
  const ys = plot.data[1] as (number | null)[];
  const { left, top, width, height } = plot.bbox;
  const { min: from, max: to } = plot.scales.x!;
  const { min: low, max: high } = plot.scales.y!;
  const across = width / (to! - from!);
  const up = height / (high! - low!);
  let drawing = false;
  let column = -1;
  let least = 0;
  let most = 0;
  let leaving = 0;
  const leave = () => {
    if (most - least > 0.5) {
      path.lineTo(column + 0.5, least);
      path.lineTo(column + 0.5, most);
      path.lineTo(column + 0.5, leaving);
    }
  };
  for (let i = first; i <= last; i++) {
    const value = ys[i];
    if (value === null || value === undefined) {
      if (drawing) leave();
      drawing = false;
      column = -1;
      continue;
    }
    const x = left + (xs[i]! - from!) * across;
    const y = top + (high! - value) * up;
    if (drawing && Math.floor(x) === column) {
      if (y < least) least = y;
      if (y > most) most = y;
      leaving = y;
      continue;
    }
    if (drawing) {
      leave();
      path.lineTo(x, y);
    } else {
      // a lone sample between two gaps shows as a short stroke
      const alone = (ys[i + 1] ?? null) === null ? 1.5 * devicePixelRatio : 0;
      path.moveTo(x - alone, y);
      path.lineTo(x + alone, y);
    }
    drawing = true;
    column = Math.floor(x);
    least = most = leaving = y;
  }
  if (drawing) leave();
  return path;
}
