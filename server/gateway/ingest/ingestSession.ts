import type { Hello, IngestErrorCode, IngestReply } from '../../../shared-types/ingest.ts';
import type { FrameToStore, StoredRun } from '../../store/store.ts';
import { stampOnArrival } from './arrivalStamps.ts';
import { type Decoded, type DecodedFrame, decodeMessage, type TrialMark } from './ingestFrame.ts';

/** What may be wrong with a hello or a claim on a channel. */
export interface Refusal {
  code: IngestErrorCode;
  detail: string;
  channel: string | null;
}

/** Called once the matter is on disk (null), or with a sentence when it could not be written. */
export type Settled = (problem: string | null) => void;

/** The ways out of a session; the hub behind them owns channels, store and watches. */
export interface IngestDoors {
  /** claims the channels for this run and says where it stands */
  greet(hello: Hello): Promise<{ ok: true; runs: Map<string, StoredRun> } | { ok: false; refusal: Refusal }>;
  /** claims a channel for a connection without hello; null when it may send */
  claim(channel: string, interval: number | null): Refusal | null;
  /** time of the newest sample taken on a channel */
  newest(channel: string): number | null;
  take(frame: FrameToStore, arrival: number, settled: Settled, mark: TrialMark | null): void;
  /** gives a frame number up */
  skip(channel: string, run: string, seq: number, digest: number, settled: Settled): void;
  /** frames `from` to `to` of a run never came */
  hole(channel: string, from: number, to: number): void;
  refused(channel: string | null, code: IngestErrorCode, detail: string): void;
  reply(reply: IngestReply): void;
  close(code: number, reason: string): void;
}

export interface IngestLimits {
  /** frames that may be unacknowledged on one connection */
  window: number;
  largestFrame: number;
}

export interface IngestSession {
  /** takes one message; `arrival` is the server clock, Unix seconds */
  message(data: string | Uint8Array, arrival: number): void;
  /** the connection is gone, or was taken over: nothing more is taken or said */
  end(): void;
}

/** Digests kept in memory of each run, to tell a frame sent again from another one. */
const DIGESTS_KEPT = 4096;
/** Messages kept while the store says where the runs stand. */
const EARLY_MESSAGES = 1024;
const POLICY_VIOLATION = 1008;
const TRY_AGAIN_LATER = 1013;

interface Run extends StoredRun {
  /** every frame up to this one is durable or given up */
  durable: number;
  acknowledged: number;
  /** a frame beyond the window was not consumed; nothing is until it comes again */
  overrun: boolean;
}

/** A decoded frame as the store takes it; t0 of the frame itself is replaced by the given one. */
function toStore(frame: DecodedFrame, run: string, seq: number, t0: number): FrameToStore {
  const { channel, digest, values } = frame;
  const times = frame.times ?? (frame.dt === null ? Float64Array.of(t0) : null);
  return { channel, run, seq, digest, t0, dt: frame.dt ?? 0, times, values };
}

/**
 * One producer's connection as a state machine without a socket: messages in, replies out, time as an argument.
 *
 * With hello: runs resume where the store has them; a frame sent again is ignored and acknowledged, other content
 * under a known number is an error, a skipped number is a recorded hole and refused when it comes after all, an unusable frame is answered in words,
 * counts as consumed and harms no other; acknowledgements are cumulative and come once frames are durable. A frame that
 * cannot be written is told and ends the session with 1013: what was not acknowledged is to be sent again. A frame
 * beyond the window is not consumed: it is refused in words, and so is what follows, until it is sent again; a
 * producer that goes on for a whole window is closed with 1008. Without hello: frames are stamped on arrival.
 */
export function createIngestSession(doors: IngestDoors, limits: IngestLimits): IngestSession {
  let mode: 'fresh' | 'greeting' | 'running' | 'plain' | 'ended' = 'fresh';
  let name = '';
  let runs = new Map<string, Run>();
  let early: { data: string | Uint8Array; arrival: number }[] = [];
  let unacknowledged = 0;
  let overruns = 0;
  let flushQueued = false;

  const refuse = (code: IngestErrorCode, error: string, channel: string | null, seq: number | null) => {
    doors.refused(channel, code, error);
    doors.reply({ error, code, ...(channel === null ? {} : { channel }), ...(seq === null ? {} : { seq }) });
  };

  const flushAcknowledgements = () => {
    flushQueued = false;
    if (mode === 'ended') return;
    for (const [channel, run] of runs) {
      if (run.durable <= run.acknowledged) continue;
      run.acknowledged = run.durable;
      doors.reply({ ack: run.durable, channel });
    }
  };

  const settledAs = (channel: string, run: Run, seq: number) => (problem: string | null) => {
    unacknowledged--;
    if (mode === 'ended') return;
    if (problem !== null) return lost(problem, channel, seq);
    run.durable = Math.max(run.durable, seq);
    if (flushQueued) return;
    flushQueued = true;
    // A commit settles many frames in one go: one acknowledgement a channel answers them all.
    queueMicrotask(flushAcknowledgements);
  };

  /**
   * A frame could not be written. Were later ones taken, it would look consumed after the next start: so nothing more
   * is taken, and the producer comes again, hears where each run stands on disk, and sends on from there.
   */
  const lost = (problem: string, channel: string, seq: number) => {
    flushAcknowledgements();
    refuse('NOT_STORED', problem, channel, seq);
    mode = 'ended';
    doors.close(TRY_AGAIN_LATER, `${problem}; connect again and send on from resume`.slice(0, 100));
  };

  const again = (channel: string, run: Run, seq: number, digest: number) => {
    const known = run.digests.get(seq);
    if (known !== undefined && known !== digest)
      return refuse(
        'OTHER_CONTENT',
        `frame ${seq} came before with other content; number each frame once`,
        channel,
        seq,
      );
    // what is not known any more may have been stored long ago
    const [oldest = Number.POSITIVE_INFINITY] = run.digests.keys();
    const isForgetful = run.digests.size === 0 || run.digests.size >= DIGESTS_KEPT;
    if (known === undefined && (seq > oldest || !isForgetful))
      return refuse(
        'TOO_LATE',
        `frame ${seq} comes after frame ${run.next - 1} and is a hole already; send the frames of a run in order`,
        channel,
        seq,
      );
    if (seq <= run.durable) doors.reply({ ack: run.durable, channel });
  };

  const mayConsume = (channel: string, run: Run, seq: number): boolean => {
    if (unacknowledged < limits.window && (!run.overrun || seq === run.next)) {
      run.overrun = false;
      return true;
    }
    run.overrun = true;
    overruns++;
    refuse(
      'TOO_MANY_UNACKNOWLEDGED',
      `${unacknowledged} frames are unacknowledged, ${limits.window} may be; wait for {ack} and send frame ${run.next} again`,
      channel,
      seq,
    );
    if (overruns > limits.window) doors.close(POLICY_VIOLATION, 'too many frames unacknowledged');
    return false;
  };

  const consume = (channel: string, run: Run, seq: number, digest: number) => {
    if (seq > run.next) doors.hole(channel, run.next, seq - 1);
    run.next = seq + 1;
    run.digests.set(seq, digest);
    if (run.digests.size > DIGESTS_KEPT) run.digests.delete(run.digests.keys().next().value!);
    overruns = 0;
    unacknowledged++;
  };

  const backwards = (channel: string, first: number): string | null => {
    const newest = doors.newest(channel);
    return newest === null || first > newest
      ? null
      : `the frame begins at ${first} s but ${channel} has samples up to ${newest} s; send later times, or use another channel name`;
  };

  const numbered = (frame: DecodedFrame) => {
    const { channel, seq, digest, t0 } = frame;
    const run = runs.get(channel);
    if (!run)
      return refuse(
        'NO_SUCH_CHANNEL',
        `"${channel}" is not in this connection's hello; name it there`,
        channel,
        seq,
      );
    if (seq === null)
      return refuse(
        'NO_SEQ',
        'the frame has no seq; after a hello, count frames of a channel from 0',
        channel,
        null,
      );
    if (seq < run.next) return again(channel, run, seq, digest);
    if (!mayConsume(channel, run, seq)) return;
    consume(channel, run, seq, digest);
    const settled = settledAs(channel, run, seq);
    const problem =
      t0 === null
        ? ({ code: 'BAD_TIMES', detail: 'the frame has no times; send t0 and dt, or t' } as const)
        : ({ code: 'TIME_BACKWARDS', detail: backwards(channel, t0) } as const);
    if (t0 !== null && problem.detail === null)
      return doors.take(toStore(frame, name, seq, t0), arrivalNow, settled, frame.mark);
    refuse(problem.code, problem.detail!, channel, seq);
    doors.skip(channel, name, seq, digest, settled);
  };

  const unusable = (code: IngestErrorCode, detail: string, channel: string | null, seq: number | null) => {
    const run = channel === null ? undefined : runs.get(channel);
    if (run && seq !== null && seq >= run.next) {
      if (!mayConsume(channel!, run, seq)) return;
      consume(channel!, run, seq, 0);
      refuse(code, detail, channel, seq);
      doors.skip(channel!, name, seq, 0, settledAs(channel!, run, seq));
    } else refuse(code, detail, channel, seq);
  };

  const plain = (frame: DecodedFrame, arrival: number) => {
    const { channel, dt, seq, values } = frame;
    if (seq !== null)
      return refuse(
        'BAD_HELLO',
        'numbered frames need a hello first; send {hello: 1, run, channels}',
        channel,
        seq,
      );
    if (dt === null && frame.times === null && values.length > 1)
      return refuse(
        'BAD_TIMES',
        `dt is missing for ${values.length} values; send the seconds between them`,
        channel,
        null,
      );
    const claim = doors.claim(channel, dt);
    if (claim) return refuse(claim.code, claim.detail, channel, null);
    const newest = doors.newest(channel);
    const stamp =
      frame.t0 !== null
        ? ({ ok: true, t0: frame.t0 } as const)
        : dt === null
          ? ({ ok: true, t0: arrival } as const)
          : stampOnArrival(newest, arrival, dt, values.length);
    if (!stamp.ok) return refuse('BAD_TIMES', stamp.detail, channel, null);
    const detail = backwards(channel, stamp.t0);
    if (detail !== null) return refuse('TIME_BACKWARDS', detail, channel, null);
    const settled: Settled = (problem) => {
      if (problem !== null && mode !== 'ended') refuse('NOT_STORED', problem, channel, null);
    };
    doors.take(toStore(frame, '', -1, stamp.t0), arrival, settled, frame.mark);
  };

  const greeted = (answer: Awaited<ReturnType<IngestDoors['greet']>>) => {
    if (mode !== 'greeting') return;
    if (!answer.ok) {
      const { code, detail, channel } = answer.refusal;
      refuse(code, detail, channel, null);
      const forGood = code === 'NOT_ALLOWED' || code === 'TOO_MANY_CHANNELS';
      return doors.close(forGood ? POLICY_VIOLATION : TRY_AGAIN_LATER, detail.slice(0, 100));
    }
    mode = 'running';
    for (const [channel, run] of answer.runs) {
      runs.set(channel, { ...run, durable: run.next - 1, acknowledged: run.next - 1, overrun: false });
      doors.reply({ resume: run.next, channel });
    }
    doors.reply({ window: limits.window });
    const waiting = early;
    early = [];
    for (const { data, arrival } of waiting) message(data, arrival);
  };

  const greet = (hello: Hello) => {
    if (mode !== 'fresh')
      return refuse(
        'BAD_HELLO',
        'the hello must be the first message of a connection; connect anew',
        null,
        null,
      );
    mode = 'greeting';
    name = hello.run;
    doors.greet(hello).then(greeted, (error: Error) => {
      refuse('NOT_STORED', error.message, null, null);
      doors.close(TRY_AGAIN_LATER, 'the store does not answer');
    });
  };

  const handle = (decoded: Decoded, arrival: number) => {
    if (!decoded.ok) {
      const { code, detail, channel, seq } = decoded;
      unusable(code, detail, channel, seq);
      if (code === 'BAD_HELLO' && mode === 'fresh')
        doors.close(POLICY_VIOLATION, `bad hello: ${detail}`.slice(0, 100));
      return;
    }
    if (decoded.kind === 'hello') return greet(decoded.hello);
    if (mode === 'fresh') mode = 'plain';
    if (mode === 'plain') plain(decoded.frame, arrival);
    else numbered(decoded.frame);
  };

  let arrivalNow = 0;
  function message(data: string | Uint8Array, arrival: number): void {
    if (mode === 'ended') return;
    if (mode === 'greeting') {
      if (early.push({ data, arrival }) > EARLY_MESSAGES)
        doors.close(POLICY_VIOLATION, 'wait for {window} before sending frames');
      return;
    }
    arrivalNow = arrival;
    handle(decodeMessage(data, limits.largestFrame), arrival);
  }

  return {
    message,
    end() {
      mode = 'ended';
      early = [];
      runs = new Map();
    },
  };
}
