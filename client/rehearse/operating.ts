import { SWITCH_OUTCOMES, WARNING_OUTCOMES } from '../../shared-types/outcomes.ts';
import type { OperatingRow, OperatingTable } from '../../shared-types/rehearsal.ts';
import type { SwitchOutcome, WarningOutcome } from '../../shared-types/warning.ts';

/** A point of a trade-off curve: false warnings an hour against the share of switches that were warned. */
export interface CurvePoint {
  falsePerHour: number;
  detection: number;
}

/** Each row of the table as a point of the curve, in the table's order; rows without a count give null. */
export function curveOf({ rows }: OperatingTable): (CurvePoint | null)[] {
  return rows.map(({ score }) =>
    score.falsePerHour.value === null || score.detection.value === null
      ? null
      : { falsePerHour: score.falsePerHour.value, detection: score.detection.value },
  );
}

/**
 * The row whose point is nearest to a place in the drawing, −1 where there is none. Among points that coincide the one
 * nearest to the row `from` is taken, so that a drag does not jump between thresholds that look the same.
 *
 * @param x,y  pixels of each row's point; NaN where it has none
 */
export function nearestRow(x: Float64Array, y: Float64Array, atX: number, atY: number, from: number): number {
  let found = -1;
  let nearest = Infinity;
  for (let row = 0; row < x.length; row++) {
    const away = (x[row]! - atX) ** 2 + (y[row]! - atY) ** 2;
    if (!(away <= nearest)) continue;
    if (away === nearest && Math.abs(row - from) >= Math.abs(found - from)) continue;
    nearest = away;
    found = row;
  }
  return found;
}

/** What is drawn of the warnings of one outcome, or the switches of one. */
export interface Lane<O> {
  outcome: O;
  count: number;
  /** places on the sheet, ascending within each recording */
  places: Float64Array;
}

/**
 * A row's warnings on the sheet, one lane for each outcome, in the order of `outcomes`.
 *
 * @param starts where each recording begins on the sheet less its own beginning: place = time + starts[recording]
 */
export function warningLanes(
  row: OperatingRow,
  starts: Float64Array,
  outcomes: readonly WarningOutcome[],
): Lane<WarningOutcome>[] {
  const laneOf = indexOfOutcomes(WARNING_OUTCOMES, outcomes);
  const { recording, at, outcome } = row;
  return partInto(outcomes, outcome, laneOf, (i) => at[i]! + starts[recording[i]!]!);
}

/**
 * The switches on the sheet by what became of them under a row, one lane for each outcome, in the order of `outcomes`.
 *
 * @param places of the result's switches on the sheet
 */
export function switchLanes(
  row: OperatingRow,
  places: Float64Array,
  outcomes: readonly SwitchOutcome[],
): Lane<SwitchOutcome>[] {
  const laneOf = indexOfOutcomes(SWITCH_OUTCOMES, outcomes);
  return partInto(outcomes, row.switches, laneOf, (i) => places[i]!);
}

function indexOfOutcomes<O>(order: readonly O[], wanted: readonly O[]): Int8Array {
  return Int8Array.from(order, (outcome) => wanted.indexOf(outcome));
}

function partInto<O>(
  outcomes: readonly O[],
  codes: Uint8Array,
  laneOf: Int8Array,
  placeOf: (i: number) => number,
): Lane<O>[] {
  const counts = new Int32Array(outcomes.length);
  for (let i = 0; i < codes.length; i++) {
    const lane = laneOf[codes[i]!]!;
    if (lane >= 0) counts[lane] = counts[lane]! + 1;
  }
  const lanes = outcomes.map((outcome, lane) => ({
    outcome,
    count: counts[lane]!,
    places: new Float64Array(counts[lane]!),
  }));
  counts.fill(0);
  for (let i = 0; i < codes.length; i++) {
    const lane = laneOf[codes[i]!]!;
    if (lane < 0) continue;
    lanes[lane]!.places[counts[lane]!] = placeOf(i);
    counts[lane] = counts[lane]! + 1;
  }
  return lanes;
}

/** Outcomes that occur anywhere in the table, in the order of `order`: the lanes that must have room while dragging. */
export function outcomesOf<O>(
  rows: readonly OperatingRow[],
  codesOf: (row: OperatingRow) => Uint8Array,
  order: readonly O[],
): O[] {
  const seen = new Uint8Array(order.length);
  for (const row of rows) {
    const codes = codesOf(row);
    for (let i = 0; i < codes.length; i++) seen[codes[i]!] = 1;
  }
  return order.filter((_, code) => seen[code] === 1);
}

/** The index of the switch nearest to a place, no further than `reach`; −1 where there is none. */
export function nearestSwitch(places: Float64Array, place: number, reach: number): number {
  let found = -1;
  let nearest = reach;
  for (let i = 0; i < places.length; i++) {
    const away = Math.abs(places[i]! - place);
    if (away > nearest) continue;
    nearest = away;
    found = i;
  }
  return found;
}
