import type { Attempt, Send } from './attempt.ts';
import { pauseAfter } from './backOff.ts';

/** A message on its way to one receiver. */
export interface Message {
  body: string;
  /** Unix seconds: later it is of no use */
  until: number;
}

/** How it ended. */
export interface Ending {
  state: 'delivered' | 'given up';
  attempts: number;
  text: string;
}

export interface QueueNeeds {
  send: Send;
  /** Unix seconds */
  now(): number;
  /** uniform in 0..1 */
  chance(): number;
}

/** One receiver's messages; no other's wait for them. */
export interface Queue<M extends Message> {
  add(message: M, ended: (ending: Ending) => void): void;
  waiting(): number;
  /** what is under way may end within the grace; nothing that is not settled by then will be */
  close(): Promise<void>;
}

/** Attempts under way at once: a slow receiver gets the newest warning while it ponders over older ones. */
const AT_ONCE = 4;
/** Beyond it the oldest is given up: a receiver that far behind has no use for it. */
const MOST_WAITING = 10_000;
const GRACE_MILLISECONDS = 2000;
const LONGEST_TIMER_SECONDS = 86_400;

interface Entry<M> {
  message: M;
  attempts: number;
  ended: (ending: Ending) => void;
  settled: boolean;
}

/**
 * Sends each message until it is delivered, refused, or of no more use; failures are followed by growing pauses, in which
 * other messages are sent. First come, first tried.
 */
export function createQueue<M extends Message>({ send, now, chance }: QueueNeeds): Queue<M> {
  const entries = new Set<Entry<M>>();
  let due: Entry<M>[] = [];
  const pauses = new Set<NodeJS.Timeout>();
  const underWay = new Set<Promise<void>>();
  const stopping = new AbortController();
  let closing = false;
  let closed = false;

  const settle = (entry: Entry<M>, state: Ending['state'], text: string) => {
    if (entry.settled || closed) return;
    entry.settled = true;
    entries.delete(entry);
    entry.ended({ state, attempts: entry.attempts, text });
  };
  const tooLate = (entry: Entry<M>, last: string) =>
    settle(entry, 'given up', last === '' ? 'its span was over' : `its span was over; it ${last}`);

  const pause = (entry: Entry<M>, attempt: Attempt & { kind: 'again' }) => {
    if (closing) return;
    const wanted = pauseAfter(entry.attempts, chance(), attempt.after);
    const left = entry.message.until - now();
    if (left <= 0) return tooLate(entry, `last ${attempt.text}`);
    const timer = setTimeout(
      () => {
        pauses.delete(timer);
        if (wanted >= left) return tooLate(entry, `last ${attempt.text}`);
        due.push(entry);
        pump();
      },
      1000 * Math.min(wanted, left, LONGEST_TIMER_SECONDS),
    );
    pauses.add(timer);
  };

  const attempt = async (entry: Entry<M>) => {
    entry.attempts++;
    const came = await send(entry.message.body, stopping.signal);
    if (entry.settled || closed) return;
    if (came.kind === 'delivered') settle(entry, 'delivered', came.text);
    else if (came.kind === 'refused') settle(entry, 'given up', came.text);
    else pause(entry, came);
  };

  const pump = () => {
    while (!closed && underWay.size < AT_ONCE && due.length > 0) {
      const entry = due.shift()!;
      if (entry.settled) continue;
      if (entry.message.until <= now()) {
        tooLate(entry, '');
        continue;
      }
      const running: Promise<void> = attempt(entry).finally(() => {
        underWay.delete(running);
        pump();
      });
      underWay.add(running);
    }
  };

  return {
    add(message, ended) {
      if (closing) return;
      const entry: Entry<M> = { message, attempts: 0, ended, settled: false };
      entries.add(entry);
      due.push(entry);
      if (entries.size > MOST_WAITING) {
        const oldest = entries.values().next().value!;
        settle(oldest, 'given up', `more than ${MOST_WAITING} messages wait for this receiver`);
        due = due.filter((one) => one !== oldest);
      }
      pump();
    },
    waiting: () => entries.size,
    async close() {
      closing = true;
      due = [];
      for (const timer of pauses) clearTimeout(timer);
      let grace: NodeJS.Timeout | undefined;
      const over = new Promise<void>((resolve) => {
        grace = setTimeout(resolve, GRACE_MILLISECONDS);
      });
      await Promise.race([Promise.all(underWay), over]);
      clearTimeout(grace);
      closed = true;
      stopping.abort();
      await Promise.all(underWay);
    },
  };
}
