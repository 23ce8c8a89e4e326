import type { IncomingMessage } from 'node:http';
import { Encoder } from 'cbor-x';
import { WebSocket } from 'ws';
import type { z } from 'zod';
import type { ChannelDescription } from '../../shared-types/channel.ts';
import { INGEST_PROTOCOL, type IngestReply } from '../../shared-types/ingest.ts';

/** Samples to send: regular (`t0`, `dt`) or each with its own time (`t`), seconds; NaN where there is no value. */
export type FrameToSend =
  | { t0: number; dt: number; values: Float64Array }
  | { t: Float64Array; values: Float64Array };

/** What a producer says of itself. */
export type ProducerState =
  | { kind: 'connecting' }
  | { kind: 'connected' }
  /** the connection is gone; tried again after `retryIn` seconds */
  | { kind: 'lost'; reason: string; retryIn: number }
  /** the server would not use a frame, or the whole connection */
  | { kind: 'refused'; error: string; code: string; channel: string | null; seq: number | null }
  /** too many frames waited: the oldest was given up; the server records a hole */
  | { kind: 'dropped'; total: number };

export interface ProducerOptions {
  /** ws://HOST:PORT/ingest */
  to: string;
  /** this start's own name, unique: a UUID */
  run: string;
  channels: z.input<typeof ChannelDescription>[];
  onState?: (state: ProducerState) => void;
  /** the clock that stamps the samples, seconds; default: the machine's */
  clock?: () => number;
  /** shown to a server that asks for one; default: FORESHIFT_TOKEN of the environment */
  token?: string | null;
  /** frames kept while the server cannot be reached; beyond it the oldest is given up. Default 20 000 */
  limit?: number;
}

export interface Producer {
  /** keeps the frame until it is acknowledged, sending it as soon as the server's window allows */
  send(channel: string, frame: FrameToSend): void;
  /** resolves once everything sent so far is acknowledged; rejects when the server refuses the connection for good */
  idle(): Promise<void>;
  /** resolves once fewer than half of `limit` frames wait: for senders that must not lose a frame */
  room(): Promise<void>;
  /** frames not yet acknowledged */
  waiting(): number;
  /** stops for good; what is not acknowledged is given up */
  close(): Promise<void>;
}

interface Kept {
  channel: string;
  seq: number;
  bytes: Uint8Array;
  sent: boolean;
  settled: boolean;
}

interface Waiter {
  ready: () => boolean;
  resolve: () => void;
  reject: (error: Error) => void;
}

const FIRST_RETRY_SECONDS = 0.25;
const LONGEST_RETRY_SECONDS = 5;
/** with frames under way and nothing heard for so long, the connection is taken for dead */
const DEAD_AFTER_MILLISECONDS = 15_000;
/** close codes after which trying again with the same words is pointless */
const REFUSED_FOR_GOOD = new Set([1002, 1003, 1007, 1008]);

/** answers to the upgrade after which the same token will not do either */
const NOT_LET_IN = new Set([401, 403, 404]);

/** What a server says that does not let a producer in. */
async function refusalOf(response: IncomingMessage): Promise<string> {
  try {
    let text = '';
    for await (const part of response.setEncoding('utf8')) if (text.length < 10_000) text += part;
    const { detail } = JSON.parse(text) as { detail?: unknown };
    if (typeof detail === 'string') return detail;
  } catch {
    // no problem details: its status tells
  }
  return `it answered ${response.statusCode}`;
}

const encoder = new Encoder({ useRecords: false });

/**
 * A resumable producer: hello, window, acknowledgements, reconnecting with growing pauses and sending again what
 * was not acknowledged. Frames go as CBOR with RFC 8746 typed arrays. At most `limit` frames are kept; beyond it
 * the oldest is given up, because the newest ones are what a watch can still use.
 */
export function createProducer(options: ProducerOptions): Producer {
  const limit = options.limit ?? 20_000;
  const token = options.token === undefined ? (process.env.FORESHIFT_TOKEN ?? null) : options.token;
  const say = options.onState ?? (() => {});
  const clock = options.clock ?? (() => Date.now() / 1000);
  const nextSeq = new Map<string, number>();
  /** by channel, the trial its next frame answers */
  const trials = new Map<string, string>();
  const kept = new Map<string, Kept[]>();
  for (const { channel } of options.channels) {
    nextSeq.set(channel, 0);
    kept.set(channel, []);
  }
  let queue: Kept[] = [];
  let cursor = 0;
  let waiting = 0;
  let underWay = 0;
  let window = 0;
  let dropped = 0;
  let socket: WebSocket | null = null;
  let retryIn = FIRST_RETRY_SECONDS;
  let retryTimer: NodeJS.Timeout | undefined;
  let heardAt = Date.now();
  let closed = false;
  let failure: Error | null = null;
  let waiters: Waiter[] = [];

  const settleWaiters = () => {
    waiters = waiters.filter((waiter) => {
      if (failure) waiter.reject(failure);
      else if (waiter.ready()) waiter.resolve();
      else return true;
      return false;
    });
  };
  const waitFor = (ready: () => boolean) =>
    new Promise<void>((resolve, reject) => {
      waiters.push({ ready, resolve, reject });
      settleWaiters();
    });

  const settle = (frame: Kept) => {
    if (frame.settled) return;
    frame.settled = true;
    waiting--;
    if (frame.sent) underWay--;
  };

  const acknowledge = (channel: string, seq: number) => {
    const frames = kept.get(channel);
    if (!frames) return;
    let count = 0;
    while (count < frames.length && frames[count]!.seq <= seq) settle(frames[count++]!);
    frames.splice(0, count);
    settleWaiters();
  };

  const dropOldest = () => {
    // one under way counts in the server's window until it is acknowledged
    const oldest = queue.find((frame) => !frame.settled && !frame.sent);
    if (!oldest) return;
    settle(oldest);
    const frames = kept.get(oldest.channel)!;
    frames.splice(frames.indexOf(oldest), 1);
    say({ kind: 'dropped', total: ++dropped });
  };

  const forgetSettled = () => {
    let settledAtHead = 0;
    while (settledAtHead < queue.length && queue[settledAtHead]!.settled) settledAtHead++;
    if (settledAtHead < 1024 && settledAtHead < queue.length) return;
    queue = queue.slice(settledAtHead);
    cursor = Math.max(0, cursor - settledAtHead);
  };

  const pump = () => {
    while (socket?.readyState === WebSocket.OPEN && underWay < window && cursor < queue.length) {
      const frame = queue[cursor++]!;
      if (frame.settled) continue;
      if (underWay === 0) heardAt = Date.now();
      frame.sent = true;
      underWay++;
      socket.send(frame.bytes);
    }
    forgetSettled();
  };

  const hear = (reply: IngestReply) => {
    heardAt = Date.now();
    if ('resume' in reply) acknowledge(reply.channel, reply.resume - 1);
    else if ('ack' in reply) {
      retryIn = FIRST_RETRY_SECONDS;
      acknowledge(reply.channel, reply.ack);
    } else if ('trial' in reply) trials.set(reply.channel, reply.trial);
    else if ('window' in reply) {
      window = reply.window;
      say({ kind: 'connected' });
    } else {
      const { error, code, channel = null, seq = null } = reply;
      say({ kind: 'refused', error, code, channel, seq });
      // it was not consumed: connecting anew tells where to go on
      if (code === 'TOO_MANY_UNACKNOWLEDGED') socket?.terminate();
    }
    pump();
  };

  const lost = (code: number, reason: string) => {
    socket = null;
    window = 0;
    underWay = 0;
    cursor = 0;
    for (const frame of queue) frame.sent = false;
    if (closed) return;
    if (failure !== null) {
      settleWaiters();
      return;
    }
    if (REFUSED_FOR_GOOD.has(code)) {
      failure = new Error(`${options.to} refused this producer: ${reason || `close code ${code}`}`);
      settleWaiters();
      return;
    }
    say({ kind: 'lost', reason: reason || `close code ${code}`, retryIn });
    retryTimer = setTimeout(connect, retryIn * 1000);
    retryIn = Math.min(2 * retryIn, LONGEST_RETRY_SECONDS);
  };

  function connect() {
    say({ kind: 'connecting' });
    heardAt = Date.now();
    const opening = new WebSocket(options.to, INGEST_PROTOCOL, {
      perMessageDeflate: false,
      handshakeTimeout: 10_000,
      headers: token === null ? {} : { Authorization: `Bearer ${token}` },
    });
    socket = opening;
    let problem = '';
    opening.on('unexpected-response', async (_request, response) => {
      problem = await refusalOf(response);
      if (NOT_LET_IN.has(response.statusCode ?? 0))
        failure = new Error(`${options.to} refused this producer: ${problem}`);
      opening.terminate();
    });
    opening.on('open', () =>
      opening.send(JSON.stringify({ hello: 1, run: options.run, channels: options.channels })),
    );
    opening.on('message', (data, binary) => {
      if (!binary) hear(JSON.parse(String(data)) as IngestReply);
    });
    opening.on('error', (error) => {
      problem ||= error.message || String((error as NodeJS.ErrnoException).code);
    });
    opening.on('close', (code, reason) => lost(code, reason.toString() || problem));
  }

  const deadline = setInterval(() => {
    const listening = socket && (underWay > 0 || socket.readyState === WebSocket.OPEN);
    if (listening && underWay > 0 && Date.now() - heardAt > DEAD_AFTER_MILLISECONDS) socket?.terminate();
  }, 1000);
  deadline.unref();
  connect();

  return {
    send(channel, frame) {
      const seq = nextSeq.get(channel);
      if (seq === undefined)
        throw new RangeError(`channel "${channel}" was not named; name it in \`channels\` of createProducer`);
      nextSeq.set(channel, seq + 1);
      const trial = trials.get(channel);
      trials.delete(channel);
      const mark = trial === undefined ? {} : { trial, sentAt: clock() };
      const bytes = encoder.encode({ channel, seq, ...frame, ...mark });
      const entry: Kept = { channel, seq, bytes, sent: false, settled: false };
      queue.push(entry);
      kept.get(channel)!.push(entry);
      waiting++;
      if (waiting > limit) dropOldest();
      pump();
    },
    idle: () => waitFor(() => waiting === 0),
    room: () => waitFor(() => waiting < limit / 2),
    waiting: () => waiting,
    close() {
      closed = true;
      clearInterval(deadline);
      clearTimeout(retryTimer);
      failure ??= new Error('the producer was closed');
      settleWaiters();
      const closing = socket;
      if (!closing) return Promise.resolve();
      return new Promise((resolve) => {
        closing.once('close', () => resolve());
        closing.close(1000);
        setTimeout(() => closing.terminate(), 1000).unref();
      });
    },
  };
}
