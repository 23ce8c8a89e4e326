import type uPlot from 'uplot';
import type { WatchState } from '../../shared-types/watch.ts';
import { element } from '../dom.ts';
import { secondRegime } from '../regimes.ts';
import { thresholdText } from '../warningWords.ts';
import { clockText, numberText } from '../words.ts';
import { tickStepFor, tickText } from './ahead.ts';
import { ink } from './ink.ts';
import { beyondLevel, carets, dashedLevel, hatchStretches, wedges } from './marks.ts';
import { CARET_ROOM, createPanel, type Panel, type PanelOptions, TIME_ROOM, WEDGE_ROOM } from './panel.ts';
import { calmRange, valueTicks } from './ticks.ts';
import type { StripView } from './view.ts';

/** A strip's two panels, signal above and watched variable below, on one axis of time. */
export interface Pair {
  setSize(width: number, height: number, root: HTMLElement): void;
  /** @param area width of the plotting area, CSS pixels */
  draw(view: StripView, area: number): void;
  valueRange(): [number, number];
  destroy(): void;
}

const BETWEEN = 10;

/** Creates the panels; without a watch only the signal. */
export function createPair(host: HTMLElement, watched: boolean): Pair {
  let view: StripView | null = null;
  let area = 600;
  let signalRange: [number, number] | null = null;
  let traceRange: [number, number] | null = null;
  const upper = element('div', 'panel');
  const lower = element('div', 'panel');
  host.append(upper);

  const times = {
    timeTicks: (from: number, to: number) => timeTicks(view, area, from, to),
    timeLabelsOf: (ticks: number[]) => timeLabels(view, ticks),
  };
  const signal = createPanel(upper, {
    ...times,
    above: WEDGE_ROOM,
    below: watched ? 0 : 4,
    timeLabels: !watched,
    colour: () => ink().ink,
    labelColour: () => ink().inkSoft,
    valueGrid: true,
    width: 1.6,
    range: (low, high) =>
      low === null ? (signalRange ?? [0, 1]) : (signalRange = calmRange(signalRange, low, high)),
    valueTicks: (low, high) => valueTicks(low, high),
    valueLabels: (ticks) => valueLabels(ticks, signalRange ?? [0, 1]),
    under: (plot) => underSignal(plot, view),
    over: (plot) => overSignal(plot, view),
  });
  if (watched) host.append(lower);
  const trace: Panel | null = watched
    ? createPanel(lower, {
        ...times,
        above: BETWEEN,
        below: CARET_ROOM,
        timeLabels: true,
        colour: () => ink().pen,
        labelColour: () => (view?.watch?.rule ? ink().red : ink().inkSoft),
        valueGrid: false,
        width: 1.4,
        range: (low, high) => (traceRange = traceRangeOf(traceRange, view?.watch ?? null, low, high)),
        ...traceLabels(() => view),
        under: () => {},
        over: (plot, line) => overTrace(plot, line, view),
      })
    : null;

  return {
    setSize: (width, height, root) => {
      const below = watched ? BETWEEN + CARET_ROOM + TIME_ROOM : 4 + TIME_ROOM;
      const room = Math.max(40, height - WEDGE_ROOM - below);
      const signalHeight = WEDGE_ROOM + Math.round(watched ? room * 0.66 : room) + (watched ? 0 : below);
      signal.setSize(width, signalHeight);
      trace?.setSize(width, height - signalHeight);
      root.style.setProperty('--strip-height', `${height}px`);
      root.style.setProperty('--signal-height', `${signalHeight}px`);
      root.style.setProperty('--foot', `${watched ? CARET_ROOM + TIME_ROOM : TIME_ROOM + 4}px`);
    },
    draw: (next, newArea) => {
      view = next;
      area = newArea;
      signal.draw(next.signal, next.from, next.to);
      trace?.draw(next.trace, next.from, next.to);
    },
    valueRange: () => signalRange ?? [0, 1],
    destroy: () => {
      signal.destroy();
      trace?.destroy();
    },
  };
}

function underSignal(plot: uPlot, view: StripView | null): void {
  if (view?.watch == null) return;
  const switches = view.page.state.switches.get(view.watch.watch) ?? [];
  const end = Math.min(view.to, view.channel.newest ?? view.to);
  hatchStretches(
    plot,
    secondRegime(
      switches,
      view.from,
      Math.max(end, view.from),
      regimeAt(view),
      view.watch?.gradeSince ?? undefined,
    ),
  );
}

/** The regime at the right edge: today's only while the edge is now. */
function regimeAt(view: StripView): number | null {
  return view.page.zoom === null ? view.watch!.regimeNow : null;
}

function overSignal(plot: uPlot, view: StripView | null): void {
  const [low, high] = [plot.scales.y!.min!, plot.scales.y!.max!];
  if (low < 0 && high > 0) dashedLevel(plot, 0, ink().edge, [1, 4]);
  if (view?.watch == null) return;
  const switches = view.page.state.switches.get(view.watch.watch) ?? [];
  wedges(
    plot,
    switches.map(({ at }) => at),
  );
}

function overTrace(plot: uPlot, line: Path2D, view: StripView | null): void {
  const rule = view?.watch?.rule;
  if (view == null || rule == null) return;
  const above = rule.direction !== 'falling';
  for (const level of levelsOf(view)) {
    dashedLevel(plot, level === rule.threshold ? rule.rearm : -rule.rearm, ink().edge, [2, 4]);
    dashedLevel(plot, level, ink().red, [7, 4]);
    beyondLevel(plot, line, level, level < 0 && isSigned(view) ? !above : above);
  }
  carets(
    plot,
    view.warnings.filter(({ quiet }) => !quiet).map(({ at }) => at),
    true,
  );
  carets(
    plot,
    view.warnings.filter(({ quiet }) => quiet).map(({ at }) => at),
    false,
  );
}

/** The threshold, and its mirror image where the trace carries the forcing with its sign. */
function levelsOf(view: StripView): number[] {
  const rule = view.watch!.rule!;
  return isSigned(view) ? [rule.threshold, -rule.threshold] : [rule.threshold];
}

function isSigned(view: StripView): boolean {
  return (
    view.watch?.rule?.variable === 'forcing' && view.trace.y.some((value) => value !== null && value < 0)
  );
}

function traceRangeOf(
  kept: [number, number] | null,
  watch: WatchState | null,
  low: number | null,
  high: number | null,
): [number, number] {
  const rule = watch?.rule ?? null;
  if (rule?.variable === 'level')
    return calmRange(
      kept,
      Math.min(low ?? rule.threshold, rule.threshold),
      Math.max(high ?? rule.threshold, rule.threshold),
    );
  const most = Math.max(high ?? 0, rule === null ? 1 : 1.35 * rule.threshold);
  if ((low ?? 0) >= 0) {
    const [, top] = calmRange(kept === null || kept[0] < -0.2 * kept[1] ? null : kept, 0, most);
    return [-0.03 * top, top];
  }
  const size = Math.max(most, -low!);
  return calmRange(kept, -size, size);
}

function traceLabels(viewNow: () => StripView | null): Pick<PanelOptions, 'valueTicks' | 'valueLabels'> {
  return {
    valueTicks: (low, high) => {
      const view = viewNow();
      return view?.watch?.rule ? levelsOf(view) : valueTicks(low, high, true);
    },
    valueLabels: (ticks) => {
      const view = viewNow();
      const rule = view?.watch?.rule;
      return ticks.map((tick) =>
        rule && view ? thresholdText(tick, rule.variable, view.channel.unit) : String(tick).replace('-', '−'),
      );
    },
  };
}

function valueLabels(ticks: number[], [low, high]: [number, number]): string[] {
  const step = ticks.length > 1 ? Math.abs(ticks[1]! - ticks[0]!) : 1;
  const decimals = Math.min(6, Math.max(0, -Math.floor(Math.log10(step) + 1e-9)));
  return ticks.map((tick) => numberText(tick, decimals, low < 0 && high > 0));
}

function timeTicks(view: StripView | null, area: number, from: number, to: number): number[] {
  const step = tickStepFor(to - from, area);
  const ticks: number[] = [];
  const base = view?.page.zoom == null ? to : 0;
  for (let k = Math.ceil((from - base) / step); base + k * step < to - 0.25 * step; k++) {
    const tick = base + k * step;
    // labels at the very edge would be cut off
    if (((tick - from) / (to - from)) * area > 14) ticks.push(tick);
  }
  return ticks;
}

function timeLabels(view: StripView | null, ticks: number[]): string[] {
  if (view === null) return ticks.map(() => '');
  const step = ticks.length > 1 ? ticks[1]! - ticks[0]! : 1;
  if (view.page.zoom === null) return ticks.map((tick) => `−${tickText(view.to - tick, step)}`);
  return ticks.map((tick) => clockText(tick, step < 1 ? 1 : 0));
}
