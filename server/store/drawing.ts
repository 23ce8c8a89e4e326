import type { Columns } from '../../shared-types/channel.ts';
import type { Visitor } from './sampleReader.ts';

/** More intervals than this without a finite sample break the line (with a little for rounding). */
const GAP_INTERVALS = 3.03;

/** Gathers finite samples and nodes into drawing columns; see `columns`. */
export interface ColumnGatherer extends Visitor {
  /**
   * The columns so far. Column k holds exactly the finite samples from t[k] up to the next column's t (to a quarter of
   * a column's width where the pyramid was used); t is the time of its first. A NaN column stands where the line is
   * to be broken: more than three intervals, and more than a column, without a finite sample; or more than a column
   * with a NaN in it.
   *
   * @param interval seconds between samples; null: the median of what was seen
   */
  columns(interval: number | null): Columns;
}

/** A gatherer of at most `columns` columns over [from, to], seconds; from < to, both finite. */
export function gatherColumns(from: number, to: number, columns: number): ColumnGatherer {
  const width = (to - from) / columns;
  const first: number[] = [];
  const last: number[] = [];
  const low: number[] = [];
  const high: number[] = [];
  const hadMissing: boolean[] = [];
  const steps: number[] = [];
  let bin = -1;
  let missing = false;
  let before = Number.NaN;

  const binOf = (t: number) => Math.min(columns - 1, Math.floor((t - from) / width));

  return {
    splits: (a, b) => b - a > width / 4 && binOf(a) !== binOf(b),
    missing: () => {
      missing = true;
    },
    take: (a, b, least, greatest, samples) => {
      steps.push(samples > 1 ? (b - a) / (samples - 1) : missing ? Number.NaN : a - before);
      const here = binOf(a);
      const at = first.length - 1;
      if (here !== bin) {
        bin = here;
        first.push(a);
        last.push(b);
        low.push(least);
        high.push(greatest);
        hadMissing.push(missing);
      } else {
        last[at] = b;
        if (least < low[at]!) low[at] = least;
        if (greatest > high[at]!) high[at] = greatest;
      }
      before = b;
      missing = false;
    },
    columns: (interval) => {
      const step = interval ?? median(steps.filter((value) => value > 0));
      const t: number[] = [];
      const lows: number[] = [];
      const highs: number[] = [];
      for (let k = 0; k < first.length; k++) {
        const hole = k === 0 ? 0 : first[k]! - last[k - 1]!;
        if (hole > width && (hadMissing[k] || hole > GAP_INTERVALS * step)) {
          t.push(last[k - 1]! + Math.min(step > 0 ? step : hole, hole) / 2);
          lows.push(Number.NaN);
          highs.push(Number.NaN);
        }
        t.push(first[k]!);
        lows.push(low[k]!);
        highs.push(high[k]!);
      }
      return { t: Float64Array.from(t), low: Float64Array.from(lows), high: Float64Array.from(highs) };
    },
  };
}

function median(values: number[]): number {
  if (values.length === 0) return 0;
  return Float64Array.from(values).sort()[values.length >> 1]!;
}
