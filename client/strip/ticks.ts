/** A tidy step (1, 2 or 5 times a power of ten) that parts a span into at most `most` pieces. */
export function tidyStep(span: number, most: number): number {
  const rough = span / Math.max(1, most);
  const power = 10 ** Math.floor(Math.log10(rough));
  for (const factor of [1, 2, 5]) if (factor * power >= rough * (1 - 1e-9)) return factor * power;
  return 10 * power;
}

const STEPS_OF_TIME = [
  1, 2, 5, 10, 15, 20, 30, 40, 60, 120, 300, 600, 900, 1200, 1800, 3600, 7200, 14400, 21600, 43200, 86400,
];

/** A step of time in seconds that people count in, parting a span into at most `most` pieces. */
export function timeStep(span: number, most: number): number {
  const rough = span / Math.max(1, most);
  if (rough <= 0.5) return tidyStep(span, most);
  return STEPS_OF_TIME.find((step) => step >= rough) ?? tidyStep(span / 86400, most) * 86400;
}

/** At least three tidy values within [low, high] (two when `few`), as far apart as that allows. */
export function valueTicks(low: number, high: number, few = false): number[] {
  for (let most = 2; ; most++) {
    const step = tidyStep(high - low, most);
    const ticks: number[] = [];
    for (let k = Math.ceil(low / step); k * step <= high; k++) ticks.push(Number((k * step).toPrecision(12)));
    if (ticks.length >= (few ? 2 : 3) || most > 8) return ticks;
  }
}

/**
 * A range that holds still: kept while the values fit and fill at least 0.45 of it, otherwise drawn anew around
 * them with a margin.
 *
 * @param kept the range so far, null at first
 */
export function calmRange(
  kept: [number, number] | null,
  low: number | null,
  high: number | null,
): [number, number] {
  if (low === null || high === null || !Number.isFinite(low) || !Number.isFinite(high)) return kept ?? [0, 1];
  if (kept !== null) {
    const fits = low >= kept[0] && high <= kept[1];
    const fills =
      high - low >= 0.45 * (kept[1] - kept[0]) ||
      (high === low && kept[1] - kept[0] <= 0.11 * Math.abs(low || 20));
    if (fits && fills) return kept;
  }
  if (high === low) return [low - 0.05 * Math.abs(low || 20), high + 0.05 * Math.abs(low || 20)];
  const margin = 0.09 * (high - low);
  return [low - margin, high + margin];
}
