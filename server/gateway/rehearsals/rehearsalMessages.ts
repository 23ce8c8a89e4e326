import type { RehearsalRequest, RulePreview, Verdict } from '../../../shared-types/rehearsal.ts';
import type { StoredSamples } from '../../recordings/readStored.ts';

/** A search as its thread is told: once, with the samples handed over. */
export interface SearchOrder {
  request: RehearsalRequest;
  recordings: StoredSamples[];
  program: string;
  /** RFC 3339 */
  at: string;
}

/** What a searching thread says: how far it has come, and in the end what was found or why nothing was. */
export type SearchReply =
  | { kind: 'progress'; done: number; doing: string }
  /** `result` is the CBOR of a RehearsalResult */
  | { kind: 'done'; result: Uint8Array; sentence: string; verdict: Verdict }
  | { kind: 'failed'; fault: string };

/** The watched variable over a recording: value i is at start + i·interval seconds; NaN where it was not seen. */
export interface DrawnTrace {
  start: number;
  interval: number;
  value: Float64Array;
}

/** What may be asked of a recording. */
export type Question =
  | { kind: 'preview'; channel: string; regime: string }
  | { kind: 'proposal'; channel: string }
  /** `model` is a model file's JSON; the recording is cut at `to`, and what is left out is said anew */
  | { kind: 'trace'; model: string; channels: string[]; to: number; leftOut: { from: number; to: number }[] };

export interface Answers {
  preview: RulePreview;
  proposal: { rule: string; why: string } | null;
  trace: DrawnTrace;
}

/** One question to the answering thread. `recording` is null when the thread has it already under this key. */
export interface HelperOrder {
  id: number;
  key: string;
  recording: StoredSamples | null;
  question: Question;
}

export type HelperReply =
  | { kind: 'answer'; id: number; answer: Answers[keyof Answers] }
  | { kind: 'refused'; id: number; code: string; message: string };

/** The memory of a recording's samples, to be handed over instead of copied. */
export const samplesOf = ({ channels }: StoredSamples): ArrayBuffer[] =>
  channels.flatMap(({ times, values }) => [times.buffer as ArrayBuffer, values.buffer as ArrayBuffer]);
