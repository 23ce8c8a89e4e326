import { type Html, html, shortWords } from './html.ts';

/** A linear scale of a drawing: `at` gives the place of a value, in drawing units. */
export interface Axis {
  low: number;
  high: number;
  at(value: number): number;
  ticks: number[];
}

/** Steps that read well: 1, 2 or 5 times a power of ten. */
function readableStep(range: number, about: number): number {
  const raw = range / about;
  const power = 10 ** Math.floor(Math.log10(raw));
  return power * ([1, 2, 5].find((step) => step * power >= raw) ?? 10);
}

/** A scale from `low` to `high` over the places `from` to `to`, with about `about` ticks. */
export function createAxis(low: number, high: number, from: number, to: number, about = 5): Axis {
  const range = high > low ? high - low : 1;
  const step = readableStep(range, about);
  const ticks: number[] = [];
  for (let i = Math.ceil(low / step - 1e-9); i * step <= low + range * (1 + 1e-9); i++)
    ticks.push(Number((i * step).toPrecision(12)));
  return { low, high: low + range, at: (value) => from + ((value - low) / range) * (to - from), ticks };
}

/** Place of a drawing's plot area. */
export interface Area {
  left: number;
  right: number;
  top: number;
  bottom: number;
}

/** Horizontal axis below an area, with its title. */
export function axisBelow(axis: Axis, { left, right, bottom }: Area, title: string): Html {
  const marks = axis.ticks.map((tick) => {
    const x = axis.at(tick).toFixed(1);
    return html`<path class="edge" d="M${x} ${bottom}v4"/><text x="${x}" y="${bottom + 16}" text-anchor="middle">${shortWords(tick)}</text>`;
  });
  return html`<path class="edge" d="M${left} ${bottom}H${right}"/>${marks}<text class="title" x="${(left + right) / 2}" y="${bottom + 33}" text-anchor="middle">${title}</text>`;
}

/** Vertical axis left of an area with fine lines across it, and its title above. */
export function axisLeft(
  axis: Axis,
  { left, right, top }: Area,
  title: string,
  words: (value: number) => string = shortWords,
): Html {
  const marks = axis.ticks.map((tick) => {
    const y = axis.at(tick);
    return html`<path class="rule" d="M${left} ${y.toFixed(1)}H${right}"/><text x="${left - 6}" y="${(y + 4).toFixed(1)}" text-anchor="end">${words(tick)}</text>`;
  });
  return html`${marks}<text class="title" x="${left}" y="${top - 12}">${title}</text>`;
}
