import { z } from 'zod';

/** A channel's name: what producers, watches and addresses call it. */
export const ChannelName = z.string().regex(/^[\p{L}\p{N}][\p{L}\p{N} ._,+-]{0,79}$/u, {
  message:
    'a channel name is 1 to 80 letters, digits, spaces or any of . _ , + - and begins with a letter or digit',
});

/** What a producer says of a channel when it connects. */
export const ChannelDescription = z.object({
  channel: ChannelName,
  /** unit of the values, as it should be read: "K", "mV" */
  unit: z.string().max(40).default(''),
  /** a person's words for the channel: "right − left thermocouple" */
  label: z.string().max(200).default(''),
  /** sampling interval in seconds, nominal; null: not said */
  interval: z.number().positive().finite().nullable().default(null),
  /** the sensor's range in the channel's unit; values at or beyond it count as saturated; null: not said */
  low: z.number().finite().nullable().default(null),
  high: z.number().finite().nullable().default(null),
});
export type ChannelDescription = z.infer<typeof ChannelDescription>;

/** A channel as the pages and `GET /api/channels` see it. All times are channel time in seconds. */
export interface ChannelState extends ChannelDescription {
  /** time of the first and of the newest sample ever stored; null before the first */
  first: number | null;
  newest: number | null;
  /** value of the newest finite sample */
  value: number | null;
  /** seconds since the newest sample arrived, by the server's monotonic clock, at the moment of sending */
  age: number | null;
  /** a producer is connected and has named this channel */
  connected: boolean;
  /** no frame for the longer of 1 s and twice the usual time between frames */
  silent: boolean;
  /** server clock minus channel time at arrival, seconds, smoothed; null for elapsed time (below 1e8) */
  clockOffset: number | null;
  /** its clock, or how late its data come, is beyond what settings.json tolerates: by the least offset lately */
  clockWrong?: boolean;
  /** samples stored; frames skipped by the producer; gaps (non-finite values or missing time) seen */
  samples: number;
  holes: number;
  gaps: number;
  /** share of the last 1000 samples at or beyond low/high */
  saturated: number;
  /** samples a second, measured over the last seconds; null when unknown */
  rate: number | null;
  /** frames refused since the server started, and the last reason in words */
  refused: number;
  refusal: string | null;
}

/** Drawing data: one extreme pair per column. `low` equals `high` where a column holds one sample. */
export interface Columns {
  /** start time of each column, ascending, seconds */
  t: Float64Array;
  /** least and greatest value in the column; NaN marks a gap */
  low: Float64Array;
  high: Float64Array;
}
