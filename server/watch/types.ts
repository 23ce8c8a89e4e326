import type { Model } from '../../shared-types/model.ts';
import type { GradedOutcome, SwitchOutcome } from '../../shared-types/warning.ts';
import type { Likeness, RegimeRule, Sight, WatchRule } from '../../shared-types/watch.ts';

/** Samples of one channel in time order. `times` null: sample i is at t0 + i·dt. NaN in `values`: no sample there. */
export interface Frame {
  channel: string;
  t0: number;
  dt: number;
  times: Float64Array | null;
  values: Float64Array;
}

/** Everything a watch needs to run; it knows nothing of where it runs. */
export interface WatchSettings {
  model: Model;
  /** one channel per channel of the model, in the model's order */
  channels: string[];
  rule: WatchRule | null;
  regime: RegimeRule | null;
  /** channel the regime rule reads; may be one of `channels` */
  regimeChannel: string | null;
}

/** What a watch has to say about a push. Times are channel time. */
export type Happening =
  /** `number` counts this watch's warnings from 0; (at + from, at + to] in seconds is its span */
  | {
      kind: 'warning';
      number: number;
      at: number;
      from: number;
      to: number;
      value: number;
      threshold: number;
    }
  /** a warning's outcome is settled; `switchAt` and `lead` for true, repeat and late ones */
  | { kind: 'graded'; at: number; outcome: GradedOutcome; switchAt: number | null; lead: number | null }
  /** a switch is confirmed; `warningAt` and `lead` name the first warning that covers it */
  | {
      kind: 'switch';
      at: number;
      confirmedAt: number;
      from: number;
      to: number;
      outcome: SwitchOutcome;
      warningAt: number | null;
      lead: number | null;
    }
  /** the delay line was emptied by a gap: no sample from `from` to `to` */
  | { kind: 'gap'; channel: string; from: number; to: number }
  | { kind: 'likeness'; at: number; likeness: Likeness };

/** The steps of one push, valid until the next push: the first `count` entries of each array. */
export interface Steps {
  count: number;
  /** grid time of the step, and the newest raw sample it needed (≥ time where it was bridged) */
  time: Float64Array;
  newest: Float64Array;
  /** the watched variable; NaN while blind */
  value: Float64Array;
}

/** A watch's memory as plain data and typed arrays; see snapshot.ts. `version` is SNAPSHOT_VERSION. */
export interface WatchSnapshot {
  version: number;
  [part: string]: unknown;
}

export interface Watch {
  /**
   * Takes a frame of one of the watch's channels; frames of other channels are ignored. The same samples in frames
   * of any size, and any interleaving of channels, give the same steps and happenings.
   */
  push(frame: Frame, happenings: Happening[]): Steps;
  /** the state now: what the page shows beside the strip */
  sight(): Sight;
  likeness(): Likeness;
  regimeNow(): number | null;
  /** seconds with a full window so far, and those of them inside the span of some warning */
  watchedSeconds(): number;
  coveredSeconds(): number;
  /** names of the channels it wants frames of */
  wants(): string[];
  snapshot(): WatchSnapshot;
}
