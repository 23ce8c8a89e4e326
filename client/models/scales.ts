import type { ForcingCounts } from '../../shared-types/model.ts';

/** Powers of ten that frame positive values: [lowest, highest] exponent, at least one decade. */
export function decadesOf(values: readonly number[]): [number, number] {
  const positive = values.filter((value) => value > 0);
  if (positive.length === 0) return [0, 1];
  const low = Math.floor(Math.log10(Math.min(...positive)) + 1e-9);
  const high = Math.ceil(Math.log10(Math.max(...positive)) - 1e-9);
  return [low, Math.max(high, low + 1)];
}

/** Density of the standard normal law. */
export const gaussian = (x: number): number => Math.exp((-x * x) / 2) / Math.sqrt(2 * Math.PI);

/** A histogram as densities, the middle of each bin beside it; their integral is 1. */
export function densitiesOf({ from, width, counts }: ForcingCounts): { x: number; density: number }[] {
  const total = counts.reduce((sum, count) => sum + count, 0);
  return counts.map((count, i) => ({
    x: from + (i + 0.5) * width,
    density: total === 0 ? 0 : count / total / width,
  }));
}

/** Ink for an entry of a matrix, 0..1: its share of the largest magnitude. */
export function inkOf(value: number, largest: number): number {
  return largest === 0 ? 0 : Math.abs(value) / largest;
}
