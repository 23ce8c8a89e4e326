import { z } from 'zod';
import { Receivers } from './delivery.ts';

/** `settings.json` in the data folder; every key may be left out, and a key that is not one of these is refused. */
export const Settings = z.strictObject({
  /** frames a producer may have unacknowledged */
  ingestWindow: z.number().int().min(1).max(100_000).default(256),
  /** largest frame accepted, in samples */
  largestFrame: z.number().int().min(1).default(100_000),
  /** seconds between commits of the store */
  commitEvery: z.number().positive().max(5).default(0.05),
  /** a recording is cut where a channel has nothing for this long, seconds */
  recordingGap: z.number().positive().default(60),
  /** samples that arrived longer ago than this are given up, seconds, at least an hour; null: none for their age */
  keepFor: z.number().min(3600).nullable().default(null),
  /**
   * the database is held at this size by giving up the oldest samples, bytes, at least 64 MiB; null: it grows. What
   * surrounds a switch, what models in use were fitted on and what a watch still needs stays in either case.
   */
  largestStore: z
    .number()
    .int()
    .min(64 * 1024 * 1024)
    .nullable()
    .default(null),
  /** producers and pages that may be connected at once */
  mostProducers: z.number().int().min(1).max(10_000).default(256),
  mostPages: z.number().int().min(1).max(10_000).default(64),
  /** channels there may be; what is named beyond them is refused */
  mostChannels: z.number().int().min(1).max(100_000).default(2000),
  /** frames and bytes a second that are read of one connection; a faster producer is read more slowly */
  fastestFrames: z.number().positive().default(5000),
  fastestBytes: z.number().positive().default(64_000_000),
  /** a channel whose times differ from the server's clock by more than this is said to have a wrong clock, seconds */
  clockTolerance: z.number().positive().default(5),
  /** where warnings go besides the pages */
  receivers: Receivers.default([]),
  /** what CloudEvents name as their source, an address that stands for this server; null: made of the machine's name */
  eventSource: z
    .string()
    .regex(/^[^\s"<>\\^`{|}]{1,300}$/, 'a source is a URI or a path without spaces')
    .nullable()
    .default(null),
});
export type Settings = z.infer<typeof Settings>;
