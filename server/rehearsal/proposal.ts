import { countSwings } from './swings.ts';

/** A rule to begin with, and why this one; rule null: none can be defended. */
export interface Proposal {
  rule: string | null;
  why: string;
}

/** Bins of the histogram, and how often it is smoothed with (1, 2, 1)/4. */
const BINS = 64;
const SMOOTHINGS = 6;
/** Values looked at, about. */
const SAMPLED = 200_000;
const FEWEST = 200;
/** A valley is deep when its density is below this share of the lower of the two humps. */
const DEEP = 0.6;
/** Each side must hold this share of the time. */
const LEAST_SHARE = 0.1;
/** A tail is one-sided when it reaches this many times farther than the other. */
const ONE_SIDED = 3;
/** Swinging about either of two sides: a deadband and a fall in shares of half the range, … */
const DEADBAND = 0.1;
const FALL = 0.25;
/** … so many visits at least, with so many swings each on average, whose periods spread by no more than this. */
const FEWEST_VISITS = 10;
const SWINGS_A_VISIT = 1.5;
const REGULAR = 0.5;

/**
 * A rule for a switch as a start, from the distribution of a channel's values; null when none can be defended. It is
 * shown to a person and never applied by itself.
 *
 * @param times  seconds, increasing
 * @param values NaN: no sample there
 */
export function proposeRule(times: Float64Array, values: Float64Array): { rule: string; why: string } | null {
  const { rule, why } = lookForRule(times, values);
  return rule === null ? null : { rule, why };
}

/**
 * As `proposeRule`, with the reason where there is no rule. Two sides: the histogram (64 bins, smoothed), parted where
 * the variance between the parts is greatest, has a hump on either side with at least a tenth of the time each and a
 * valley between them of less than 0.6 of the lower hump. An excursion or a dip: from the median, the 99.9 % quantile
 * reaches at least three times as far as the 0.1 % one, or the other way round. Two sides also where the signal swings
 * on one side several times, at a nearly regular pace, before it goes to the other, as a circulation loop does. The
 * marks 0.6, a tenth, three and those of the swings are our own.
 *
 * @see Otsu 1979, IEEE Transactions on Systems, Man, and Cybernetics 9, 62 (the parting)
 */
export function lookForRule(times: Float64Array, values: Float64Array): Proposal {
  const sorted = sampledFinite(values).sort();
  if (sorted.length < FEWEST) {
    return {
      rule: null,
      why: `only ${sorted.length} values, at least ${FEWEST} are needed to see how they are spread`,
    };
  }
  const quantile = (share: number) => sorted[Math.round(share * (sorted.length - 1))]!;
  if (!(quantile(0.999) > quantile(0.001))) return { rule: null, why: 'the channel does not move' };
  return (
    twoSided(sorted, quantile(0.002), quantile(0.998)) ??
    oneSided(times, values, quantile) ??
    swinging(times, values, quantile(0.01), quantile(0.99)) ?? {
      rule: null,
      why: 'the values have neither two humps with a deep valley between them nor one long tail, nor do they swing on one side for a while; look at the signal and write a rule by hand',
    }
  );
}

function sampledFinite(values: Float64Array): Float64Array {
  const stride = Math.max(1, Math.floor(values.length / SAMPLED));
  const kept = new Float64Array(Math.ceil(values.length / stride));
  let count = 0;
  for (let i = 0; i < values.length; i += stride) if (Number.isFinite(values[i]!)) kept[count++] = values[i]!;
  return kept.slice(0, count);
}

function twoSided(sorted: Float64Array, low: number, high: number): Proposal | null {
  const width = (high - low) / BINS;
  const density = smoothed(histogram(sorted, low, width));
  const parting = greatestBetween(density);
  const left = largestIn(density, 0, parting);
  const right = largestIn(density, parting, BINS);
  const valley = smallestIn(density, left, right + 1);
  const depth = density[valley]! / Math.min(density[left]!, density[right]!);
  const total = density.reduce((sum, one) => sum + one, 0);
  const below = density.subarray(0, valley).reduce((sum, one) => sum + one, 0) / total;
  if (!(depth < DEEP) || Math.min(below, 1 - below) < LEAST_SHARE) return null;
  const at = (bin: number) => low + (bin + 0.5) * width;
  const reach = Math.min(at(valley) - at(left), at(right) - at(valley)) / 2;
  const digits = digitsFor(high - low);
  return {
    rule: `sides:${(at(valley) - reach).toFixed(digits)},${(at(valley) + reach).toFixed(digits)}`,
    why: `the values have two humps, near ${at(left).toFixed(digits)} and ${at(right).toFixed(digits)}, with a valley between them of ${(100 * depth).toFixed(0)} % of the lower hump`,
  };
}

function swinging(times: Float64Array, values: Float64Array, low: number, high: number): Proposal | null {
  const [level, half] = [(low + high) / 2, (high - low) / 2];
  const deadband = DEADBAND * half;
  const found = countSwings(times, values, { level, deadband, fall: FALL * half });
  const { visits, swings, period, spread, above } = found;
  const oneSideOnly = Math.min(above, 1 - above) < LEAST_SHARE;
  if (visits < FEWEST_VISITS || swings < SWINGS_A_VISIT * visits || oneSideOnly || !(spread <= REGULAR))
    return null;
  const digits = digitsFor(high - low);
  return {
    rule: `sides:${(level - deadband).toFixed(digits)},${(level + deadband).toFixed(digits)}`,
    why: `the values swing on one side of ${level.toFixed(digits)} ${(swings / visits).toFixed(1)} times on average, every ${Number(period.toPrecision(2))} s or so, before they go to the other`,
  };
}

function histogram(sorted: Float64Array, low: number, width: number): Float64Array {
  const counts = new Float64Array(BINS);
  for (const value of sorted) {
    const bin = Math.floor((value - low) / width);
    if (bin >= 0 && bin < BINS) counts[bin] = counts[bin]! + 1;
  }
  return counts;
}

function smoothed(counts: Float64Array): Float64Array {
  let density = counts;
  for (let round = 0; round < SMOOTHINGS; round++) {
    density = density.map((count, i) => {
      return ((density[i - 1] ?? count) + 2 * count + (density[i + 1] ?? count)) / 4;
    });
  }
  return density;
}

/** The bin before which the variance between the two parts is greatest. */
function greatestBetween(density: Float64Array): number {
  const total = density.reduce((sum, one) => sum + one, 0);
  const moment = density.reduce((sum, one, i) => sum + i * one, 0);
  let found = 1;
  let greatest = -1;
  let below = 0;
  let belowMoment = 0;
  for (let i = 1; i < density.length; i++) {
    below += density[i - 1]!;
    belowMoment += (i - 1) * density[i - 1]!;
    if (below === 0 || below === total) continue;
    const apart = belowMoment / below - (moment - belowMoment) / (total - below);
    const between = below * (total - below) * apart * apart;
    if (between <= greatest) continue;
    greatest = between;
    found = i;
  }
  return found;
}

function largestIn(density: Float64Array, from: number, to: number): number {
  let found = from;
  for (let i = from; i < to; i++) if (density[i]! > density[found]!) found = i;
  return found;
}

function smallestIn(density: Float64Array, from: number, to: number): number {
  let found = from;
  for (let i = from; i < to; i++) if (density[i]! < density[found]!) found = i;
  return found;
}

function oneSided(
  times: Float64Array,
  values: Float64Array,
  quantile: (share: number) => number,
): Proposal | null {
  const median = quantile(0.5);
  const up = quantile(0.999) - median;
  const down = median - quantile(0.001);
  if (Math.max(up, down) < ONE_SIDED * Math.min(up, down)) return null;
  const sign = up > down ? 1 : -1;
  const reach = Math.max(up, down);
  const digits = digitsFor(reach);
  const level = Number((median + (sign * reach) / 2).toFixed(digits));
  const rearm = Number((median + (sign * reach) / 4).toFixed(digits));
  const gap = gapBetween(risesOf(times, values, sign, level, rearm));
  const kind = sign === 1 ? 'excursion' : 'dip';
  const factor = Math.min(up, down) > 0 ? `${(reach / Math.min(up, down)).toFixed(0)} times as far` : 'far';
  return {
    rule: `${kind}:${level},${rearm},${gap}`,
    why: `the values reach ${factor} ${sign === 1 ? 'above' : 'below'} their median as on the other side; half of that way is the level${gap > 0 ? `, and rises within ${gap} s belong together` : ''}`,
  };
}

function risesOf(
  times: Float64Array,
  values: Float64Array,
  sign: 1 | -1,
  level: number,
  rearm: number,
): number[] {
  const rises: number[] = [];
  let armed = false;
  for (let i = 0; i < values.length; i++) {
    const value = sign * values[i]!;
    if (value < sign * rearm) armed = true;
    if (!armed || !(value > sign * level)) continue;
    armed = false;
    rises.push(times[i]!);
  }
  return rises;
}

/** Where the times between rises fall apart into short and long ones by a factor of three or more; else 0. */
function gapBetween(rises: readonly number[]): number {
  const between = rises
    .slice(1)
    .map((time, i) => time - rises[i]!)
    .sort((a, b) => a - b);
  let gap = 0;
  let widest = 3;
  for (let i = 1; i < between.length; i++) {
    const factor = between[i]! / between[i - 1]!;
    if (factor <= widest) continue;
    widest = factor;
    gap = Number(Math.sqrt(between[i]! * between[i - 1]!).toPrecision(2));
  }
  return gap;
}

/** Decimals with which a span of values is told in about three figures. */
const digitsFor = (span: number): number => Math.min(12, Math.max(0, 2 - Math.floor(Math.log10(span))));
