/** What of a watch's channels and trace must stay: from `before` seconds before each of its switches to `after` after it. */
export interface SwitchPin {
  watch: string;
  channels: string[];
  before: number;
  after: number;
}

/** Which samples may go. */
export interface PruneRules {
  /** server clock, Unix seconds */
  now: number;
  /** what arrived longer ago than this, seconds, goes; null: nothing for its age */
  keepFor: number | null;
  /** while the database holds more bytes than this, the oldest go; null: nothing for its size */
  largestBytes: number | null;
  /** a recording is cut where nothing came for this long, seconds */
  recordingGap: number;
  switches: SwitchPin[];
  /** times of a channel that must stay, both ends included */
  stretches: { channel: string; from: number; to: number }[];
  /** ordinal of the first sample of a channel that a snapshot still needs */
  needed: { channel: string; ordinal: number }[];
}

/** What a step came to. */
export interface PruneStep {
  /** samples given up, and of which channels */
  samples: number;
  channels: string[];
  /** bytes in use after it, and bytes of the database file */
  usedBytes: number;
  fileBytes: number;
  /** another step is worth while at once */
  more: boolean;
  /** bytes above the ceiling although everything that may go is gone */
  short: number;
}
