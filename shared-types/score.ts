/** A figure with its 95 % interval; value null where nothing was counted. */
export interface Interval {
  value: number | null;
  low: number | null;
  high: number | null;
}

/** The score of a watch over a stretch of data. Spans are seconds, fractions 0..1. */
export interface Score {
  switches: { total: number; warned: number; late: number; missed: number; blind: number };
  warnings: {
    total: number;
    true: number;
    repeat: number;
    late: number;
    false: number;
    open: number;
    unseen: number;
    acted: number;
  };
  detection: Interval;
  cameTrue: Interval;
  falseRatio: Interval;
  falsePerHour: Interval;
  lead: { median: number | null; p10: number | null; p90: number | null; random: number | null };
  /** share of watched steps inside the union of the spans */
  tau: number;
  /** detection − tau: height above the diagonal of the Molchan diagram */
  skill: number | null;
  /** skill over that of the perfect warner; null when that is below 0.2 */
  skillShare: number | null;
  /** from circular shifts; null where none were made (live grades) */
  pValue: number | null;
  watchedSeconds: number;
}
