/** One run of uniformly spaced values: value i is at start + i·interval. */
export interface GridRun {
  start: number;
  values: Float64Array;
}

/**
 * Puts a whole recorded channel on a grid, cut into runs at long gaps: the same state machine as the live way.
 * STUB SIGNATURE, to be written by the lead.
 */
export function gridRuns(_times: Float64Array, _values: Float64Array, _interval: number, _gapIntervals: number): GridRun[] {
  throw new Error('not written yet');
}
