import { Encoder } from 'cbor-x';
import type { RehearsalResult } from '../../../shared-types/rehearsal.ts';
import { modelFromJson } from '../../model/modelFile.ts';
import { pickChannel } from '../../recordings/pickChannel.ts';
import { hashOf, type StoredSamples } from '../../recordings/readStored.ts';
import { gridChannels } from '../../rehearsal/gridded.ts';
import { previewRule } from '../../rehearsal/preview.ts';
import { proposeRule } from '../../rehearsal/proposal.ts';
import { runRehearsal } from '../../rehearsal/rehearsal.ts';
import { traceOf } from '../../rehearsal/trace.ts';
import { usualInterval } from '../../signal/grid.ts';
import { InputError } from '../../signal/inputError.ts';
import { leaveOut } from '../../signal/leaveOut.ts';
import { parseRegimeRule } from '../../watch/regimeRuleText.ts';
import type { Answers, DrawnTrace, Question, SearchOrder, SearchReply } from './rehearsalMessages.ts';

const encoder = new Encoder({ useRecords: false });

/** Intervals without a sample that are bridged, as a model has it unless said. */
const GAP_INTERVALS = 3;

/** A search from its order to its result; `tell` hears how far it has come. */
export function search(
  { request, recordings, program, at }: SearchOrder,
  tell: (done: number, doing: string) => void,
): SearchReply {
  const started = performance.now();
  try {
    const task = recordings.map(({ name, channels, leftOut }) => ({
      name,
      sha256: hashOf(channels),
      series: channels,
      leftOut,
    }));
    const result: RehearsalResult = runRehearsal({ request, recordings: task, program, at }, tell);
    result.seconds = (performance.now() - started) / 1000;
    const { sentence, verdict } = result;
    // a copy of its own: the encoder's memory is larger and its own
    return { kind: 'done', result: Uint8Array.from(encoder.encode(result)), sentence, verdict };
  } catch (error) {
    return { kind: 'failed', fault: faultOf(error) };
  }
}

function faultOf(error: unknown): string {
  const { message } = error as Error;
  return error instanceof InputError ? message : `the search failed: ${message}`;
}

/**
 * The answer to a question about a recording.
 *
 * @throws InputError where the question makes no sense
 */
export function answer(recording: StoredSamples, question: Question): Answers[keyof Answers] {
  if (question.kind === 'trace') return trace(recording, question);
  const { times, values } = pickChannel({ ...recording, sha256: '' }, question.channel);
  const kept = leaveOut(times, values, recording.leftOut);
  if (question.kind === 'proposal') return proposeRule(times, kept);
  return previewRule({ times, values: kept }, regimeOf(question.regime), intervalOf(times), GAP_INTERVALS);
}

const intervalOf = (times: Float64Array): number => (times.length > 1 ? usualInterval(times) : 1);

function regimeOf(text: string) {
  try {
    return parseRegimeRule(text);
  } catch (error) {
    throw new InputError('BAD_REGIME', (error as Error).message);
  }
}

function trace(recording: StoredSamples, asked: Extract<Question, { kind: 'trace' }>): DrawnTrace {
  const model = modelFromJson(asked.model);
  const { interval, gapIntervals } = model;
  const series = recording.channels.map(({ channel, times, values }) => {
    const count = times.findLastIndex((time) => time <= asked.to) + 1;
    const kept = times.subarray(0, count);
    return { channel, times: kept, values: leaveOut(kept, values.subarray(0, count), asked.leftOut) };
  });
  const gridded = gridChannels(series, { channels: asked.channels, interval, gapIntervals });
  if (gridded === null) return { start: 0, interval, value: new Float64Array() };
  return { start: gridded.start, interval, value: traceOf(model, gridded, model.rule!.variable).value };
}
