import { z } from 'zod';

/** `settings.json` in the data folder; every key may be left out. */
export const Settings = z.object({
  /** frames a producer may have unacknowledged */
  ingestWindow: z.number().int().min(1).max(100_000).default(256),
  /** largest frame accepted, in samples */
  largestFrame: z.number().int().min(1).default(100_000),
  /** seconds between commits of the store */
  commitEvery: z.number().positive().max(5).default(0.05),
  /** a recording is cut where a channel has nothing for this long, seconds */
  recordingGap: z.number().positive().default(60),
});
export type Settings = z.infer<typeof Settings>;
