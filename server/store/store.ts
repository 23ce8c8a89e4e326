import type { ChannelDescription, Columns } from '../../shared-types/channel.ts';
import type { LogEntry, SwitchEvent, Warning } from '../../shared-types/warning.ts';

/** A frame on its way to disk. `times` null: sample i is at t0 + i·dt. */
export interface FrameToStore {
  channel: string;
  /** the producer's run; '' for a connection without hello */
  run: string;
  /** frame number in the run; −1 for a connection without hello */
  seq: number;
  /** 32-bit digest of the content, to tell a resent frame from another one */
  digest: number;
  t0: number;
  dt: number;
  times: Float64Array | null;
  /** NaN where there was no value */
  values: Float64Array;
}

/** Samples of one channel as read back. `ordinal` counts the channel's stored samples from 0, in order of arrival. */
export interface StoredBlock {
  ordinal: number;
  times: Float64Array;
  values: Float64Array;
}

export interface StoredChannel extends ChannelDescription {
  /** samples ever stored (also the ordinal of the next), holes, gaps */
  samples: number;
  holes: number;
  gaps: number;
  first: number | null;
  newest: number | null;
  value: number | null;
}

/** Where a run stands: the next frame expected and the digests of the newest frames (at least 4096 kept). */
export interface StoredRun {
  next: number;
  digests: Map<number, number>;
}

/** A watch as stored. `settings` is the JSON of the gateway's own settings object. */
export interface StoredWatch {
  watch: string;
  settings: string;
  /** CBOR of the watch's snapshot and the ordinal of the first sample of each channel that is not in it; null: none yet */
  snapshot: Uint8Array | null;
}

/** What one push of a watch leaves behind; written in one transaction with the frames queued before it. */
export interface WatchProgress {
  watch: string;
  snapshot: Uint8Array;
  /** variable on its grid, for drawing: appended to the watch's trace */
  trace: { times: Float64Array; values: Float64Array } | null;
}

/** A recording cut out of what a channel has stored. */
export interface StoredRecording {
  /** `CHANNEL/N`, N from 1 in time order */
  name: string;
  channel: string;
  from: number;
  to: number;
  samples: number;
}

/**
 * What must survive. One embedded database in a data folder; every promise resolves once the matter is on disk
 * (group commit), in the order of the calls. The implementation runs in a worker thread (`storeThread.ts`) or in
 * line (`openStore`); callers cannot tell.
 *
 * Errors: a rejected promise carries `code: 'FULL' | 'DAMAGED' | 'CLOSED' | 'FAILED'` and a sentence.
 */
export interface Store {
  saveChannel(channel: ChannelDescription): Promise<void>;
  channels(): Promise<StoredChannel[]>;

  appendFrames(frames: FrameToStore[]): Promise<void>;
  /** a skipped frame number or a gap, counted on the channel */
  countFault(channel: string, fault: 'hole' | 'gap', count: number): Promise<void>;
  run(channel: string, run: string): Promise<StoredRun>;
  /** frames whose seq was given up (refused), so that a restart does not wait for them */
  skipFrame(channel: string, run: string, seq: number, digest: number): Promise<void>;

  /** samples from `ordinal` on, at most `most` of them, oldest first; empty when there are none */
  samplesFrom(channel: string, ordinal: number, most: number): Promise<StoredBlock>;
  /** samples with from ≤ t ≤ to, oldest first */
  samplesBetween(channel: string, from: number, to: number): Promise<StoredBlock>;
  /** drawing data of a channel or of a watch's trace from the min/max pyramid: about `columns` columns over [from, to] */
  signalColumns(channel: string, from: number, to: number, columns: number): Promise<Columns>;
  traceColumns(watch: string, from: number, to: number, columns: number): Promise<Columns>;
  /** what a channel has stored, cut where nothing came for `gapSeconds` */
  recordings(gapSeconds: number): Promise<StoredRecording[]>;

  saveModel(name: string, json: string): Promise<void>;
  model(name: string): Promise<string | null>;
  models(): Promise<{ name: string; json: string }[]>;

  saveWatch(watch: StoredWatch): Promise<void>;
  watches(): Promise<StoredWatch[]>;
  saveProgress(progress: WatchProgress[]): Promise<void>;

  /**
   * New warning (id 0: one is given) or a changed one. A warning of the same watch and the same `at` is the same
   * warning: its id is kept, so that a replay after a crash does not warn twice. Returns the id.
   */
  saveWarning(warning: Warning): Promise<number>;
  /** oldest first; `after`: only ids above it; `newest`: the last `most` instead of the first */
  warnings(query: { channel?: string; watch?: string; after?: number; most?: number; newest?: boolean; since?: number }): Promise<Warning[]>;
  /** as warnings: same watch and same `at` is the same switch */
  saveSwitch(event: SwitchEvent): Promise<number>;
  switches(query: { channel?: string; watch?: string; since?: number; most?: number }): Promise<SwitchEvent[]>;

  log(entry: Omit<LogEntry, 'id'>): Promise<number>;
  logEntries(query: { after?: number; most?: number; newest?: boolean }): Promise<LogEntry[]>;

  /** commits what is queued and closes; everything after rejects with CLOSED */
  close(): Promise<void>;
}
