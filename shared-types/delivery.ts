import { z } from 'zod';

/** A secret is never in the settings themselves, so that it is in no copy and no log of them. */
const Secret = {
  /** a file that holds it, in or below the data folder, or an absolute path; its last line break does not count */
  secretFile: z.string().min(1).optional(),
  /** the environment variable that holds it */
  secretVariable: z.string().min(1).optional(),
};

/**
 * Where warnings go besides the pages: an address they are posted to, or a program that is run. Only settings.json names
 * receivers, nothing that comes over the network does.
 */
export const Receiver = z
  .strictObject({
    /** as it is called in the log, and the key's name in signatures */
    name: z.string().regex(/^[\w .-]{1,60}$/, 'a name is 1 to 60 letters, digits, spaces or any of _ . -'),
    /** http or https; each warning is posted to it as a CloudEvent */
    url: z.url({ protocol: /^https?$/ }).optional(),
    ...Secret,
    /** a program and its arguments, run without a shell for each warning, which it reads from its standard input */
    command: z.array(z.string()).min(1).optional(),
    /** names or ids of the watches it hears of; left out: all */
    watches: z.array(z.string().min(1)).optional(),
    /** its success counts as somebody having acted on the warning */
    acts: z.boolean().default(false),
    /** it also hears what became of the warnings */
    outcomes: z.boolean().default(false),
    /** it also gets the trials by which the delay is measured; a program never does */
    trials: z.boolean().default(true),
    /** seconds an attempt may take */
    timeLimit: z.number().positive().max(60).default(10),
  })
  .refine(({ url, command }) => (url === undefined) !== (command === undefined), {
    message: 'a receiver has either a url or a command; name one of them',
  })
  .refine(({ url }) => url === undefined || !/^https?:\/\/[^/?#]*@/i.test(url), {
    message: 'an address is written without user and password: they would be in logs; use a secret',
  })
  .refine(({ secretFile, secretVariable }) => secretFile === undefined || secretVariable === undefined, {
    message: 'a receiver has one secret; name secretFile or secretVariable, not both',
  })
  .refine((receiver) => receiver.command === undefined || secretOf(receiver) === undefined, {
    message: 'a command is not signed; take its secret out',
  });
export type Receiver = z.infer<typeof Receiver>;

const secretOf = (receiver: { secretFile?: string | undefined; secretVariable?: string | undefined }) =>
  receiver.secretFile ?? receiver.secretVariable;

export const Receivers = z
  .array(Receiver)
  .max(100)
  .refine((all) => new Set(all.map(({ name }) => name)).size === all.length, {
    message: 'two receivers have one name; name each differently',
  });

/** What a receiver is told: a warning was issued, what became of it, or a trial. */
export type DeliveryKind = 'issued' | 'graded' | 'trial';

/** What became of one message to one receiver. */
export interface Delivery {
  id: number;
  receiver: string;
  kind: DeliveryKind;
  /** the CloudEvent's id: the same each time it is sent */
  event: string;
  watch: string;
  /** 0 for a trial */
  warning: number;
  /** server clock, Unix seconds */
  madeAt: number;
  /** `withheld`: it was never to be sent (too late to speak, shelved), which `text` says */
  state: 'pending' | 'delivered' | 'given up' | 'withheld';
  /** attempts since the server started */
  attempts: number;
  settledAt: number | null;
  /** how it ended, in words */
  text: string;
}

/** One part of the way from the rig to a person, seconds; null: it could not be measured. */
export interface DelayPart {
  seconds: number | null;
  how: 'measured' | 'estimated' | 'not measured';
  text: string;
}

/** What a trial found out about how late a warning of a watch comes to a person. */
export interface MeasuredDelay {
  watch: string;
  trial: string;
  /** server clock, Unix seconds, and who asked for it */
  at: number;
  by: string;
  /** the producer answered the trial with a marked frame */
  answered: boolean;
  /** until the oldest sample of a frame is on its way */
  rig: DelayPart;
  network: DelayPart;
  /** from a frame's arrival until the watch has read it */
  program: DelayPart;
  /** until the page has painted it or its tone has begun, whichever is later */
  delivery: DelayPart;
  page: DelayPart;
  tone: DelayPart;
  /** each webhook, until it answered that it has it */
  webhooks: (DelayPart & { receiver: string })[];
  /** rig, network, program and delivery together, as far as they are known */
  total: number;
  /** null: the watch has no watch rule */
  leastLead: number | null;
  /** what is left of the least lead for a person; negative: a warning may come too late */
  left: number | null;
}

/** A trial as pages are told of it: to be shown as one, and echoed once it is. */
export interface Trial {
  id: string;
  watch: string;
  channel: string;
}

/** What a page echoes; seconds since it had the trial. */
export const TrialSeen = z.object({
  trialSeen: z.string().min(1).max(100),
  /** until it was painted; null: the page is hidden and paints nothing */
  painted: z.number().nonnegative().max(60).nullable(),
  /** until its tone began; null: the tone is off */
  tone: z.number().nonnegative().max(60).nullable(),
  /** until this was sent */
  held: z.number().nonnegative().max(60),
});
export type TrialSeen = z.infer<typeof TrialSeen>;

/** Who asks for a trial. */
export const NewTrial = z.object({ by: z.string().max(80).default('') });
