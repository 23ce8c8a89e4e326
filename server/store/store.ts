import type { ChannelDescription, Columns } from '../../shared-types/channel.ts';
import type { Delivery, MeasuredDelay } from '../../shared-types/delivery.ts';
import type { Mark, StoredCondition } from '../../shared-types/rehearsal.ts';
import type { LogEntry, SwitchEvent, Warning } from '../../shared-types/warning.ts';
import type { LogbookQuery, LogbookRow } from './logbook.ts';
import type { PruneRules, PruneStep } from './pruneRules.ts';

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
  /** ordinal of the sample after the last; more than `ordinal` and the length together where samples were pruned between */
  next: number;
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

/** A finished rehearsal. `state` is the gateway's JSON, `result` the CBOR of what was found. */
export interface StoredRehearsal {
  id: string;
  state: string;
  result: Uint8Array;
}

/** A message to a receiver as stored. */
export interface StoredDelivery extends Delivery {
  /** the CloudEvent to be sent, byte for byte the same each time; '' once it is settled */
  body: string;
  /** server clock, Unix seconds: sent later it would be of no use */
  until: number;
}

/** Which deliveries are asked for. */
export interface DeliveryQuery {
  after?: number;
  warning?: number;
  receiver?: string;
  most?: number;
  /** the last `most` instead of the first */
  newest?: boolean;
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
  /** `CHANNEL/N`, N from 1 in order of arrival */
  name: string;
  channel: string;
  from: number;
  to: number;
  samples: number;
  /** of its first sample: the recording is `samples` from there, also where times repeat (elapsed time, started again) */
  ordinal: number;
}

/** What may also be read while a server writes, by another process (`openStoreReader`). */
export interface StoreReader {
  channels(): Promise<StoredChannel[]>;
  /**
   * samples from `ordinal` on, at most `most` of them, in order of arrival; empty when there are none. Times ascend
   * within a block: it ends early where time steps back, so only an empty one is the end; go on from `next`. Pruned
   * samples are passed over.
   */
  samplesFrom(channel: string, ordinal: number, most: number): Promise<StoredBlock>;
  /** samples with from ≤ t ≤ to, oldest first; where times were recorded twice, what arrived last */
  samplesBetween(channel: string, from: number, to: number): Promise<StoredBlock>;
  /** drawing data of a channel or of a watch's trace from the min/max pyramid: about `columns` columns over [from, to], at most twice as many and a NaN one at each break */
  signalColumns(channel: string, from: number, to: number, columns: number): Promise<Columns>;
  traceColumns(watch: string, from: number, to: number, columns: number): Promise<Columns>;
  /** what a channel has stored, cut where nothing came for `gapSeconds` */
  recordings(gapSeconds: number): Promise<StoredRecording[]>;
  model(name: string): Promise<string | null>;
  models(): Promise<{ name: string; json: string }[]>;
  /** stretches and conditions to be left out, in the order they were made; none in a store of version 1 */
  marks(): Promise<Mark[]>;
  conditions(): Promise<StoredCondition[]>;
  close(): Promise<void>;
}

/**
 * What must survive. One embedded database in a data folder; every promise resolves once the matter is on disk
 * (group commit), in the order of the calls. The implementation runs in a worker thread (`storeThread.ts`) or in
 * line (`openStore`); callers cannot tell.
 *
 * Errors: a rejected promise carries `code: 'FULL' | 'DAMAGED' | 'CLOSED' | 'FAILED'` and a sentence. FULL and DAMAGED roll
 * back everything since the last commit and reject all calls made before the caller could know: ask `run` again for
 * where each run stands before going on. FAILED concerns that call alone.
 */
export interface Store extends StoreReader {
  /** what happened while it was opened that a person should know, in sentences, for the log; empty when nothing did */
  readonly notices: readonly string[];
  saveChannel(channel: ChannelDescription): Promise<void>;

  appendFrames(frames: FrameToStore[]): Promise<void>;
  /** a skipped frame number or a gap, counted on the channel */
  countFault(channel: string, fault: 'hole' | 'gap', count: number): Promise<void>;
  run(channel: string, run: string): Promise<StoredRun>;
  /** frames whose seq was given up (refused), so that a restart does not wait for them */
  skipFrame(channel: string, run: string, seq: number, digest: number): Promise<void>;

  saveModel(name: string, json: string): Promise<void>;

  /** a new watch or changed settings; without a snapshot the one that is stored stays */
  saveWatch(watch: StoredWatch): Promise<void>;
  watches(): Promise<StoredWatch[]>;
  saveProgress(progress: WatchProgress[]): Promise<void>;

  /**
   * New warning (id 0: one is given) or a changed one. A warning of the same watch and the same `at` is the same
   * warning: its id is kept, so that a replay after a crash does not warn twice. Returns the id.
   */
  saveWarning(warning: Warning): Promise<number>;
  /** oldest first; `after`: only ids above it; `newest`: the last `most` instead of the first */
  warnings(query: {
    channel?: string;
    watch?: string;
    after?: number;
    most?: number;
    newest?: boolean;
    since?: number;
  }): Promise<Warning[]>;
  /** as warnings: same watch and same `at` is the same switch */
  saveSwitch(event: SwitchEvent): Promise<number>;
  switches(query: {
    channel?: string;
    watch?: string;
    after?: number;
    since?: number;
    most?: number;
  }): Promise<SwitchEvent[]>;

  /** a new mark (id 0: one is given) or a changed one; returns its id. Removing what is not there changes nothing. */
  saveMark(mark: Mark): Promise<number>;
  removeMark(id: number): Promise<void>;
  saveCondition(condition: StoredCondition): Promise<number>;
  removeCondition(id: number): Promise<void>;

  saveRehearsal(rehearsal: StoredRehearsal): Promise<void>;
  removeRehearsal(id: string): Promise<void>;
  /** in the order they were saved */
  rehearsals(): Promise<Omit<StoredRehearsal, 'result'>[]>;
  rehearsalResult(id: string): Promise<Uint8Array | null>;

  /**
   * A new message to a receiver (id 0: one is given) or a changed one. Returns its id, or null when a new one is known
   * already: same receiver and same event is the same message.
   */
  saveDelivery(delivery: StoredDelivery): Promise<number | null>;
  /** oldest first */
  deliveries(query: DeliveryQuery): Promise<StoredDelivery[]>;
  /** what is still to be sent */
  pendingDeliveries(): Promise<StoredDelivery[]>;
  /** the newest measured delay of a watch */
  saveDelay(delay: MeasuredDelay): Promise<void>;
  delay(watch: string): Promise<MeasuredDelay | null>;

  log(entry: Omit<LogEntry, 'id'>): Promise<number>;
  logEntries(query: { after?: number; most?: number; newest?: boolean }): Promise<LogEntry[]>;
  /** warnings, switches and the log in one order of time, newest first unless said */
  logbook(query: LogbookQuery): Promise<LogbookRow[]>;

  /** one small step of pruning: gives up the oldest samples that the rules let go, and tells what it came to */
  prune(rules: PruneRules): Promise<PruneStep>;

  /** commits what is queued and closes; everything after rejects with CLOSED */
  close(): Promise<void>;
}
