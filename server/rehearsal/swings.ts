/** How a signal swings about a level: visits to either side of it, and swings within them. */
export interface Swings {
  /** times on one side until the other is reached */
  visits: number;
  /** swings away from the level, counted over all visits */
  swings: number;
  /** seconds from one swing's peak to the next of the same visit: median, and (upper − lower quartile) / median */
  period: number;
  spread: number;
  /** share of the time on the upper side */
  above: number;
}

/**
 * Counts visits and swings. A visit begins when the signal is `deadband` beyond `level` on the other side; a swing is a
 * peak away from the level that is followed by a fall of at least `fall`.
 *
 * @param times  seconds, increasing
 * @param values the channel's unit; NaN: no sample there
 */
export function countSwings(
  times: Float64Array,
  values: Float64Array,
  { level, deadband, fall }: { level: number; deadband: number; fall: number },
): Swings {
  const periods: number[] = [];
  let [side, visits, swings, above, counted] = [0, 0, 0, 0, 0];
  let [peak, peakAt, lowest, risen, before] = [0, 0, 0, false, Number.NaN];
  const endSwing = () => {
    if (!risen) return;
    swings++;
    if (!Number.isNaN(before)) periods.push(peakAt - before);
    before = peakAt;
    risen = false;
  };
  for (let i = 0; i < values.length; i++) {
    const away = values[i]! - level;
    if (Number.isNaN(away)) continue;
    const reached = away > deadband ? 1 : away < -deadband ? -1 : side;
    if (reached !== side) {
      endSwing();
      side = reached;
      visits++;
      [peak, peakAt, lowest, risen, before] = [side * away, times[i]!, 0, true, Number.NaN];
    }
    if (side === 0) continue;
    counted++;
    if (side === 1) above++;
    const height = side * away;
    if (!risen) {
      lowest = Math.min(lowest, height);
      if (height - lowest < fall) continue;
      [peak, peakAt, risen] = [height, times[i]!, true];
    } else if (height > peak) [peak, peakAt] = [height, times[i]!];
    else if (peak - height >= fall) {
      endSwing();
      lowest = height;
    }
  }
  endSwing();
  const sorted = Float64Array.from(periods).sort();
  const quantile = (share: number) => sorted[Math.round(share * (sorted.length - 1))] ?? Number.NaN;
  const period = quantile(0.5);
  return {
    visits,
    swings,
    period,
    spread: (quantile(0.75) - quantile(0.25)) / period,
    above: above / counted,
  };
}
