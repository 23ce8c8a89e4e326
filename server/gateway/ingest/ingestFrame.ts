import { Decoder, setSizeLimits } from 'cbor-x';
import { FrameEnvelope, Hello, type IngestErrorCode } from '../../../shared-types/ingest.ts';
import { parseTime } from '../../signal/time.ts';
import { complaint } from '../complaint.ts';
import { frameDigest } from './digest.ts';
import { copyNumbers, countOf, inWords, type Numbers } from './numbers.ts';

/** A usable frame. `seq` null: none was given. `t0` null: no times were given, it is stamped on arrival. */
export interface DecodedFrame {
  channel: string;
  seq: number | null;
  t0: number | null;
  /** seconds between samples; null with `times`, or where nothing was said */
  dt: number | null;
  /** strictly increasing, seconds; null where the samples are regular */
  times: Float64Array | null;
  /** a copy of its own; NaN where there was no value */
  values: Float64Array;
  digest: number;
  /** it answers a trial */
  mark: TrialMark | null;
}

/** What a frame that answers a trial says besides its samples. */
export interface TrialMark {
  trial: string;
  /** when it was sent, by the clock that stamps the samples, seconds; null: not said */
  sentAt: number | null;
}

/** What one message was. A bad one is a value; channel and seq are named where they could be read. */
export type Decoded =
  | { ok: true; kind: 'hello'; hello: Hello }
  | { ok: true; kind: 'frame'; frame: DecodedFrame }
  | { ok: false; code: IngestErrorCode; detail: string; channel: string | null; seq: number | null };

/** Times beyond this are taken for milliseconds: 1e11 s is the year 5138. */
const LATEST_TIME = 1e11;

// A short message may announce billions of entries: the decoder must not believe it.
setSizeLimits({ maxArraySize: 8_000_000, maxMapSize: 10_000, maxObjectSize: 10_000 });
const cbor = new Decoder({ mapsAsObjects: true, useRecords: false });

class Unusable {
  readonly code: IngestErrorCode;
  readonly detail: string;
  constructor(code: IngestErrorCode, detail: string) {
    this.code = code;
    this.detail = detail;
  }
}

function parse(message: string | Uint8Array): unknown {
  try {
    return typeof message === 'string' ? JSON.parse(message) : cbor.decode(message);
  } catch (error) {
    const code = typeof message === 'string' ? 'NOT_JSON' : 'NOT_CBOR';
    const expected =
      typeof message === 'string'
        ? 'a text frame must be one JSON document'
        : 'a binary frame must be one CBOR item (RFC 8949), numbers as an array or an RFC 8746 typed array';
    throw new Unusable(code, `${expected}: ${(error as Error).message}`);
  }
}

function numbersOf(copied: Numbers, code: IngestErrorCode): Float64Array {
  if (!copied.ok) throw new Unusable(code, copied.detail);
  return copied.numbers;
}

function secondsOf(time: unknown, field: string): number {
  try {
    const seconds = typeof time === 'number' ? time : parseTime(String(time));
    if (Number.isFinite(seconds) && Math.abs(seconds) <= LATEST_TIME) return seconds;
  } catch {
    // said below in this protocol's own words
  }
  const milliseconds = typeof time === 'number' && Math.abs(time) > LATEST_TIME ? ' (milliseconds?)' : '';
  throw new Unusable(
    'BAD_TIMES',
    `${field} is ${inWords(time)}${milliseconds}; send seconds or an RFC 3339 string`,
  );
}

function timesOf(source: unknown, count: number): Float64Array {
  const spelt = Array.isArray(source) && source.some((time) => typeof time === 'string');
  const times = spelt
    ? Float64Array.from(source, (time, i) => secondsOf(time, `t[${i}]`))
    : numbersOf(copyNumbers(source, 't', false), 'BAD_TIMES');
  if (times.length !== count)
    throw new Unusable('BAD_TIMES', `t holds ${times.length} times for ${count} values; send one for each`);
  let last = Number.NEGATIVE_INFINITY;
  for (let i = 0; i < times.length; i++) {
    const time = times[i]!;
    if (!(Math.abs(time) <= LATEST_TIME)) secondsOf(time, `t[${i}]`);
    if (time <= last)
      throw new Unusable(
        'BAD_TIMES',
        `t[${i}] = ${time} is not after t[${i - 1}] = ${last}; times must increase`,
      );
    last = time;
  }
  return times;
}

function valuesOf(source: unknown, largest: number): Float64Array {
  const count = countOf(source);
  if (count > largest)
    throw new Unusable('TOO_LARGE', `the frame holds ${count} values; send at most ${largest} a frame`);
  const values = numbersOf(copyNumbers(source, 'values', true), 'BAD_VALUES');
  if (values.length === 0) throw new Unusable('BAD_VALUES', 'values is empty; send at least one');
  // One bit pattern for all that is no number, so that equal frames have equal digests.
  for (let i = 0; i < values.length; i++) if (!Number.isFinite(values[i]!)) values[i] = Number.NaN;
  return values;
}

function markOf({ trial, sentAt }: FrameEnvelope): TrialMark | null {
  if (trial === undefined) return null;
  try {
    return { trial, sentAt: sentAt === undefined ? null : secondsOf(sentAt, 'sentAt') };
  } catch {
    return { trial, sentAt: null };
  }
}

function frameOf(message: Record<string, unknown>, largest: number): DecodedFrame {
  const envelope = FrameEnvelope.safeParse(message);
  if (!envelope.success) throw new Unusable('NOT_A_FRAME', complaint(envelope.error));
  const { channel, seq = null, dt = null } = envelope.data;
  const values = valuesOf(message.values, largest);
  const times = message.t === undefined ? null : timesOf(message.t, values.length);
  if (times && (envelope.data.t0 !== undefined || dt !== null))
    throw new Unusable('BAD_TIMES', 'the frame has t as well as t0 or dt; send either t, or t0 and dt');
  const t0 = times ? times[0]! : envelope.data.t0 === undefined ? null : secondsOf(envelope.data.t0, 't0');
  if (t0 !== null && !times && dt === null && values.length > 1)
    throw new Unusable(
      'BAD_TIMES',
      `dt is missing for ${values.length} values; send the seconds between them`,
    );
  if (t0 !== null && dt !== null && t0 + dt * (values.length - 1) > LATEST_TIME)
    throw new Unusable('BAD_TIMES', `the frame ends after ${LATEST_TIME} s; send t0 and dt in seconds`);
  if (t0 !== null && dt !== null && values.length > 1 && t0 + dt <= t0)
    throw new Unusable('BAD_TIMES', `dt = ${dt} s vanishes beside t0 = ${t0} s in float64; send a longer dt`);
  const digest = frameDigest(t0 ?? 0, dt ?? 0, times, values);
  return { channel, seq, t0, dt, times, values, digest, mark: markOf(envelope.data) };
}

function helloOf(message: Record<string, unknown>): Hello {
  const hello = Hello.safeParse(message);
  if (!hello.success) throw new Unusable('BAD_HELLO', complaint(hello.error));
  const names = new Set(hello.data.channels.map(({ channel }) => channel));
  if (names.size < hello.data.channels.length)
    throw new Unusable('BAD_HELLO', 'the hello names a channel twice; name each once');
  return hello.data;
}

/**
 * Decodes one WebSocket message of a producer: JSON text or CBOR with the same keys. Never throws: a message that
 * cannot be used is a value with a stable code and a sentence. Numbers are copied, null and non-finite values
 * become NaN, `t` must increase strictly within the frame.
 *
 * @param message text or bytes as received; not kept
 * @param largest most values a frame may hold
 */
export function decodeMessage(message: string | Uint8Array, largest: number): Decoded {
  let channel: string | null = null;
  let seq: number | null = null;
  try {
    const parsed = parse(message);
    if (typeof parsed !== 'object' || parsed === null || Array.isArray(parsed) || ArrayBuffer.isView(parsed))
      throw new Unusable(
        'NOT_A_FRAME',
        `the message is ${inWords(parsed)}; send an object with channel and values`,
      );
    const fields = parsed as Record<string, unknown>;
    if ('hello' in fields) return { ok: true, kind: 'hello', hello: helloOf(fields) };
    if (typeof fields.channel === 'string') channel = fields.channel;
    if (Number.isSafeInteger(fields.seq) && (fields.seq as number) >= 0) seq = fields.seq as number;
    return { ok: true, kind: 'frame', frame: frameOf(fields, largest) };
  } catch (error) {
    const { code, detail } = error instanceof Unusable ? error : new Unusable('NOT_A_FRAME', String(error));
    return { ok: false, code, detail, channel, seq };
  }
}
