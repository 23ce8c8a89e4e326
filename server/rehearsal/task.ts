import type { Model } from '../../shared-types/model.ts';
import type { RehearsalRequest } from '../../shared-types/rehearsal.ts';
import type { RecordedSeries } from './playback.ts';

/** A recorded channel and, where it is known, its unit. */
export interface TaskSeries extends RecordedSeries {
  unit?: string;
}

/** One recording of a rehearsal, with the stretches of it that must not count. */
export interface TaskRecording {
  name: string;
  sha256: string;
  series: readonly TaskSeries[];
  /** seconds, channel time */
  leftOut: readonly { from: number; to: number; why: string }[];
}

/** Everything a rehearsal needs; it reads no file and no clock. */
export interface RehearsalTask {
  request: RehearsalRequest;
  recordings: readonly TaskRecording[];
  /** name and version of the program, for the provenance */
  program: string;
  /** RFC 3339 */
  at: string;
  /** judge this model and its rule instead of searching; null or left out: search */
  model?: Model | null;
  /** seconds between grid steps; left out: the usual interval of the first recording's first channel */
  interval?: number;
  /** the longest time without a sample that is bridged, in intervals (default 3) */
  gapIntervals?: number;
}
