import { z } from 'zod';
import { ChannelDescription, ChannelName } from './channel.ts';

/** WebSocket subprotocol of `/ingest`. Text frames are JSON, binary frames CBOR with the same keys. */
export const INGEST_PROTOCOL = 'foreshift.ingest.1';

/** First message of a producer that wants to be resumable. */
export const Hello = z.object({
  hello: z.literal(1),
  /** the producer's own name for this start of it, a UUID say */
  run: z.string().min(1).max(200),
  channels: z.array(ChannelDescription).min(1).max(1024),
});
export type Hello = z.infer<typeof Hello>;

/**
 * A frame's envelope. The numbers themselves (`values`, `t`) are checked by the gateway's own loop, which
 * takes arrays of numbers and nulls as well as RFC 8746 typed arrays.
 */
export const FrameEnvelope = z.object({
  channel: ChannelName,
  /** counts a channel's frames within the run from 0; absent only on a connection without hello */
  seq: z.number().int().nonnegative().optional(),
  /** time of the first sample: seconds, or an RFC 3339 string */
  t0: z.union([z.number(), z.string()]).optional(),
  /** seconds between samples */
  dt: z.number().positive().finite().optional(),
  /** the answer to a trial: its id, as the server sent it. A mark that cannot be read harms no frame. */
  trial: z.string().min(1).max(100).optional().catch(undefined),
  /** with a trial: when the frame was sent, by the clock that stamps the samples */
  sentAt: z.union([z.number(), z.string()]).optional().catch(undefined),
});
export type FrameEnvelope = z.infer<typeof FrameEnvelope>;

/** What the server says on `/ingest`. */
export type IngestReply =
  | { resume: number; channel: string }
  | { window: number }
  | { ack: number; channel: string }
  /** asks for the channel's next frame to be marked; a producer that does not know of trials passes it over */
  | { trial: string; channel: string }
  | { error: string; code: IngestErrorCode; channel?: string; seq?: number };

/** Stable codes of the errors a producer may be told of. */
export type IngestErrorCode =
  | 'NOT_JSON'
  | 'NOT_CBOR'
  | 'NOT_A_FRAME'
  | 'NO_SUCH_CHANNEL'
  | 'BAD_HELLO'
  | 'NO_SEQ'
  | 'OTHER_CONTENT'
  | 'TOO_LATE'
  | 'BAD_TIMES'
  | 'TIME_BACKWARDS'
  | 'BAD_VALUES'
  | 'TOO_LARGE'
  | 'TOO_MANY_UNACKNOWLEDGED'
  | 'NOT_STORED'
  | 'CHANNEL_IN_USE'
  | 'NOT_ALLOWED'
  | 'TOO_MANY_CHANNELS';
