import { tidyStep } from '../strip/ticks.ts';

/**
 * Scale of the trade-off curve. False warnings an hour are drawn by their square root, because most that matters happens
 * between none and a few; the share warned is linear.
 */
export interface TradeOffScale {
  /** false warnings an hour at the right edge, and shares warned at the lower and the upper edge */
  most: number;
  left: number;
  right: number;
  top: number;
  bottom: number;
}

/** Horizontal pixel of a number of false warnings an hour; what lies beyond the edge stays at the edge. */
export function acrossOf({ most, left, right }: TradeOffScale, falsePerHour: number): number {
  return left + (right - left) * Math.sqrt(Math.min(1, Math.max(0, falsePerHour) / most));
}

/** Vertical pixel of a share warned. */
export function downOf({ top, bottom }: TradeOffScale, detection: number): number {
  return bottom - (bottom - top) * Math.min(1, Math.max(0, detection));
}

/**
 * The right edge: all of the chosen variable's curve fits and so does the ceiling, with room to spare; at least one
 * false warning an hour.
 */
export function edgeFor(falsePerHour: readonly number[], ceiling: number | null): number {
  const most = Math.max(...falsePerHour.filter(Number.isFinite), ceiling ?? 0, 0);
  if (most === 0) return 1;
  const step = tidyStep(most, 4);
  return Math.ceil((most * 1.02) / step - 1e-9) * step;
}

/** Ticks of false warnings an hour, at least `apart` pixels from each other: 0, then 1, 2 or 5 times powers of ten. */
export function falseTicks(scale: TradeOffScale, apart: number): number[] {
  const candidates: number[] = [];
  for (let power = Math.floor(Math.log10(scale.most)) - 2; 10 ** power <= scale.most; power++)
    for (const factor of [1, 2, 5]) {
      const value = Number((factor * 10 ** power).toPrecision(1));
      if (value <= scale.most * (1 + 1e-9)) candidates.push(value);
    }
  const ticks: number[] = [];
  let last = Infinity;
  for (const value of candidates.reverse()) {
    const at = acrossOf(scale, value);
    if (last - at < apart || at - scale.left < apart) continue;
    ticks.push(value);
    last = at;
  }
  return [0, ...ticks.reverse()];
}
