/** One channel of a recording: samples in time order, times strictly increasing, gaps as NaN values or missing time. */
export interface RecordedChannel {
  channel: string;
  unit: string;
  /** seconds, channel time */
  times: Float64Array;
  values: Float64Array;
}

/** A recording as commands use it: a file, or a range of what the store holds. */
export interface Recording {
  /** the file's path or `stored:NAME` */
  name: string;
  channels: RecordedChannel[];
  /** SHA-256 of the file's bytes, or of the samples (times then values, little-endian float64) when stored */
  sha256: string;
  /** of a stored one: what marks and conditions leave out; the values are still there */
  leftOut?: LeftOutStretch[];
}

/** A stretch that must not count, ends included (seconds, channel time), and why in words. */
export interface LeftOutStretch {
  from: number;
  to: number;
  why: string;
}
