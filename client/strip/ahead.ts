import type { Warning } from '../../shared-types/warning.ts';
import { element, mark } from '../dom.ts';
import { timeStep } from './ticks.ts';
import type { StripView } from './view.ts';

/** The darker paper right of now: what lies ahead, with the spans open warnings speak for. */
export interface Ahead {
  root: HTMLElement;
  /** ticks and labels, when scale or width changed; CSS pixels per second of the plot */
  ruleOff(perSecond: number, width: number, tickStep: number): void;
  /** puts the spans where they stand now; cheap, for every frame */
  slide(view: StripView, perSecond: number): void;
}

interface Span {
  root: HTMLElement;
  usual: HTMLElement;
  left: number;
  width: number;
}

/** Creates the paper ahead. */
export function createAhead(): Ahead {
  const ticks = element('div', 'aheadTicks');
  const spans = element('div', 'spans');
  const root = element(
    'div',
    'ahead',
    element('div', 'aheadPaper'),
    ticks,
    spans,
    element('div', 'nowLine'),
    element('span', 'nowWord', 'now'),
  );
  root.setAttribute('aria-hidden', 'true');
  const drawn: Span[] = [];
  let ruled = '';
  return {
    root,
    ruleOff: (perSecond, width, tickStep) => {
      const key = `${perSecond.toFixed(4)} ${width} ${tickStep}`;
      if (key === ruled) return;
      ruled = key;
      const made: HTMLElement[] = [];
      for (let at = tickStep; at * perSecond < width - 26; at += tickStep) {
        const tick = element('span', 'aheadTick', element('span', '', `+${tickText(at, tickStep)}`));
        tick.style.transform = `translateX(${Math.round(at * perSecond)}px)`;
        if (at * perSecond > 34) made.push(tick);
      }
      ticks.replaceChildren(...made);
    },
    slide: (view, perSecond) => {
      const now = view.now;
      const shown = now === null ? [] : view.open.filter((warning) => now <= warning.to);
      while (drawn.length > shown.length) drawn.pop()!.root.remove();
      while (drawn.length < shown.length) drawn.push(appendSpan(spans));
      shown.forEach((warning, i) => {
        place(drawn[i]!, warning, view, (warning.from - now!) * perSecond, perSecond);
      });
    },
  };
}

function appendSpan(host: HTMLElement): Span {
  const usual = element('div', 'usual');
  const root = element('div', 'span', usual);
  host.append(root);
  return { root, usual, left: NaN, width: NaN };
}

function place(span: Span, warning: Warning, view: StripView, left: number, perSecond: number): void {
  const acknowledged = warning.acknowledgedAt !== null || view.watch?.trigger === true;
  mark(span.root, 'data-acknowledged', acknowledged ? 'yes' : null);
  const rounded = Math.round(left * 4) / 4;
  const width = Math.max(3, (warning.to - warning.from) * perSecond);
  if (span.width !== width) {
    span.width = width;
    span.root.style.width = `${width}px`;
    const usual = view.watch?.promise?.lead.median ?? null;
    const at = usual === null ? -1 : (warning.at + usual - warning.from) * perSecond;
    span.usual.hidden = at < 0 || at > width;
    span.usual.style.transform = `translateX(${at}px)`;
  }
  if (span.left !== rounded) {
    span.left = rounded;
    span.root.style.transform = `translateX(${rounded}px)`;
  }
}

/** Seconds between the labels of a plot of some width that looks so far back. */
export function tickStepFor(seconds: number, width: number): number {
  return timeStep(seconds, Math.max(2, Math.floor(width / (width < 420 ? 84 : 120))));
}

/** A distance from now at a tick: "40 s", "5 min", "2 h", in the unit that suits the step between ticks. */
export function tickText(seconds: number, step: number): string {
  if (step >= 3600) return `${Number((seconds / 3600).toFixed(1))} h`;
  if (step >= 60) return `${Number((seconds / 60).toFixed(1))} min`;
  return `${step >= 1 ? Math.round(seconds) : Number(seconds.toFixed(2))} s`;
}
