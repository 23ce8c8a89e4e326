import { tidyStep } from '../strip/ticks.ts';

/** Leads counted into bins of equal width; bin i holds leads in [start + i·width, start + (i + 1)·width). */
export interface Histogram {
  start: number;
  width: number;
  counts: Int32Array;
  most: number;
}

/** Bins of a tidy width from the least lead or 0 to the horizon, about so many. */
const BINS = 24;

/** The empty bins that a rehearsal's leads are counted into: the same for every threshold, so that nothing jumps. */
export function createHistogram(leastLead: number, horizon: number, delay: number): Histogram {
  const from = Math.min(0, leastLead - delay);
  const width = tidyStep(horizon - from, BINS);
  const first = Math.floor(from / width + 1e-9);
  const last = Math.ceil(horizon / width - 1e-9);
  return {
    start: first * width,
    width,
    counts: new Int32Array(Math.max(1, last - first + 1)),
    most: 0,
  };
}

/** Counts leads (s) into a histogram, in place of what it held; leads outside are counted in the bin at the edge. */
export function countInto(histogram: Histogram, leads: Float64Array): void {
  const { start, width, counts } = histogram;
  counts.fill(0);
  let most = 0;
  for (let i = 0; i < leads.length; i++) {
    // a lead of whole bins must not fall into the bin before it by rounding
    const bin = Math.floor((leads[i]! - start) / width + 1e-6);
    const kept = bin < 0 ? 0 : bin >= counts.length ? counts.length - 1 : bin;
    counts[kept] = counts[kept]! + 1;
    if (counts[kept]! > most) most = counts[kept]!;
  }
  histogram.most = most;
}
