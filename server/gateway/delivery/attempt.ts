/** What came of sending a message once; `text` in words, without secrets. */
export type Attempt =
  | { kind: 'delivered'; text: string }
  /** it may go better later; `after`: seconds the receiver asked for */
  | { kind: 'again'; text: string; after: number | null }
  /** it would go the same way again */
  | { kind: 'refused'; text: string };

/** Sends a CloudEvent's JSON once; never throws. `signal` ends it early: then it is to be sent again. */
export type Send = (body: string, signal: AbortSignal) => Promise<Attempt>;
