import { hostname } from 'node:os';
import type { Delivery, DeliveryKind } from '../../../shared-types/delivery.ts';
import type { Warning } from '../../../shared-types/warning.ts';
import type { WatchState } from '../../../shared-types/watch.ts';
import type { Store, StoredDelivery } from '../../store/store.ts';
import type { Journal } from '../journal.ts';
import { type CloudEvent, sourceOf, warningEvent } from './cloudEvent.ts';
import { createQueue, type Ending, type Queue } from './queue.ts';
import type { OpenReceiver } from './receivers.ts';

export interface DeliveryNeeds {
  store: Store;
  journal: Pick<Journal, 'log'>;
  receivers: readonly OpenReceiver[];
  /** what CloudEvents name as their source; null: made of the machine's name */
  source: string | null;
  /** server clock, Unix seconds */
  now(): number;
  /** a channel's time now; null before its first sample */
  channelTime(channel: string): number | null;
  /** null: there is no such watch */
  watch(watch: string): WatchState | null;
  /** the first receiver has it */
  delivered(watch: string, warning: number): void;
  /** a receiver's success counts as acting on the warning */
  acted(warning: number, by: string, text: string): void;
  /** uniform in 0..1 */
  chance?(): number;
}

/** Sends warnings to the receivers of settings.json. Nothing here is waited for by what issues warnings. */
export interface Deliveries {
  receivers: readonly OpenReceiver[];
  source: string;
  /** a new warning; `journal` has given it its id */
  issued(warning: Warning): void;
  /** a warning changed: its outcome is told if there is one */
  changed(warning: Warning): void;
  /** sends what a crash left unsent; what was issued before is taken up now */
  start(): Promise<void>;
  /** messages that wait, by receiver */
  waiting(): [string, number][];
  close(): Promise<void>;
}

/** An outcome is of use for a day. */
const OUTCOME_SECONDS = 86_400;
/** So many of the newest warnings are looked through for open ones after a start. */
const LOOKED_THROUGH = 1000;

/** What is still pending, with its place in the outbox: null until the store has given it one. */
interface Outgoing extends StoredDelivery {
  written: Promise<number | null>;
}

const plainOf = ({ written: _, ...delivery }: Outgoing): StoredDelivery => delivery;

/** Why a watch's warnings are told nobody; null: they are told. `false`: it is not even noted. */
function withheld(state: WatchState, warning: Warning): string | null | false {
  if (state.use !== 'in use') return false;
  if (warning.quiet) return 'it came too late to speak: its span had begun when it was made';
  if (state.state === 'shelved' || state.state === 'out of service') return `the watch was ${state.state}`;
  return null;
}

const entryOf = (
  receiver: string,
  kind: DeliveryKind,
  event: CloudEvent,
  warning: Warning,
  madeAt: number,
  until: number,
): StoredDelivery => ({
  id: 0,
  receiver,
  kind,
  event: event.id,
  watch: warning.watch,
  warning: warning.id,
  madeAt,
  state: 'pending',
  attempts: 0,
  settledAt: null,
  text: '',
  body: JSON.stringify(event),
  until,
});

/**
 * Delivery, at least once: each message is written to the outbox while it is first sent, and marked when it is settled;
 * what a crash leaves unmarked is sent again, byte for byte. A warning that the crash kept out of the outbox is found by
 * its being open still. A warning is given up once its span is over, an outcome after a day.
 */
export function createDeliveries(needs: DeliveryNeeds): Deliveries {
  const { store, now, receivers } = needs;
  const chance = needs.chance ?? Math.random;
  const source = needs.source ?? sourceOf(hostname());
  const queues = new Map<string, Queue<Outgoing>>(
    receivers.map(({ name, send }) => [name, createQueue<Outgoing>({ send, now, chance })]),
  );
  const byName = new Map(receivers.map((receiver) => [receiver.name, receiver]));
  /** what is in a queue, so that nothing is put there twice */
  const queued = new Set<string>();
  const writing = new Set<Promise<unknown>>();
  let early: (() => void)[] | null = [];

  /** writes; a store that cannot is said to be in trouble by others, and what is sent goes on */
  const save = (delivery: StoredDelivery): Promise<number | null> => {
    const saving: Promise<number | null> = store
      .saveDelivery(delivery)
      .catch(() => 0)
      .finally(() => writing.delete(saving));
    writing.add(saving);
    return saving;
  };

  const tell = ({ receiver, kind, watch, warning }: Delivery, { attempts, text }: Ending) => {
    const what = kind === 'issued' ? `warning ${warning}` : `the outcome of warning ${warning}`;
    const tries = attempts > 1 ? ` (${attempts} attempts)` : '';
    needs.journal.log({
      kind: 'delivery',
      channel: needs.watch(watch)?.channels[0] ?? null,
      watch,
      by: null,
      text: `${what} did not reach "${receiver}": ${text}${tries}`,
    });
  };

  const settled = async (outgoing: Outgoing, ending: Ending) => {
    const { receiver, kind, watch, warning } = outgoing;
    queued.delete(`${receiver}\n${outgoing.event}`);
    if (ending.state === 'given up') tell(outgoing, ending);
    else if (kind === 'issued') {
      needs.delivered(watch, warning);
      if (byName.get(receiver)?.acts) needs.acted(warning, receiver, ending.text);
    }
    // a message that is not in the outbox (id 0 or null) is put there settled
    const id = (await outgoing.written) ?? 0;
    await save({ ...plainOf(outgoing), ...ending, id, settledAt: now() });
  };

  const enqueue = (delivery: StoredDelivery, written: Promise<number | null>) => {
    const key = `${delivery.receiver}\n${delivery.event}`;
    if (queued.has(key)) return;
    queued.add(key);
    const outgoing: Outgoing = { ...delivery, written };
    queues.get(delivery.receiver)!.add(outgoing, (ending) => {
      const marking = settled(outgoing, ending).finally(() => writing.delete(marking));
      writing.add(marking);
    });
  };

  /** when a warning's span is over, by the server's clock */
  const overAt = ({ channels, madeAt, at, to }: Warning): number => {
    const time = needs.channelTime(channels[0]!);
    return time === null ? madeAt + to - at : now() + to - time;
  };

  /** `known` false: it is new for sure and sent while it is being written */
  const send = (warning: Warning, kind: 'issued' | 'graded', known: boolean) => {
    const state = needs.watch(warning.watch);
    const why = state === null ? false : withheld(state, warning);
    if (state === null || why === false) return;
    const madeAt = now();
    const until = kind === 'issued' ? overAt(warning) : madeAt + OUTCOME_SECONDS;
    const event = warningEvent(
      warning,
      kind,
      state,
      source,
      kind === 'issued' ? warning.madeAt : madeAt,
      until,
    );
    for (const { name, hears, outcomes } of receivers) {
      if (!hears(state.watch, state.name) || (kind === 'graded' && !outcomes)) continue;
      const entry = entryOf(name, kind, event, warning, madeAt, until);
      if (why !== null) {
        if (kind === 'issued') void save({ ...entry, state: 'withheld', settledAt: madeAt, text: why });
        continue;
      }
      const written = save(entry);
      if (!known) enqueue(entry, written);
      else void written.then((id) => id !== null && enqueue({ ...entry, id }, written));
    }
  };

  const whenStarted = (run: () => void) => {
    if (receivers.length === 0) return;
    if (early === null) run();
    else early.push(run);
  };

  const takeUp = async () => {
    for (const delivery of await store.pendingDeliveries()) {
      const written = Promise.resolve(delivery.id);
      if (byName.has(delivery.receiver)) enqueue(delivery, written);
      else
        void settled(
          { ...delivery, written },
          { state: 'given up', attempts: 0, text: 'settings.json names no such receiver any more' },
        );
    }
    if (receivers.length === 0) return;
    for (const warning of await store.warnings({ newest: true, most: LOOKED_THROUGH }))
      if (warning.outcome === 'open' && !warning.quiet && overAt(warning) > now())
        send(warning, 'issued', true);
  };

  return {
    receivers,
    source,
    issued(warning) {
      const copy = { ...warning };
      whenStarted(() => send(copy, 'issued', false));
    },
    changed(warning) {
      if (warning.outcome === 'open') return;
      const copy = { ...warning };
      whenStarted(() => send(copy, 'graded', true));
    },
    async start() {
      await takeUp();
      const waiting = early ?? [];
      early = null;
      for (const run of waiting) run();
    },
    waiting: () => receivers.map(({ name }) => [name, queues.get(name)!.waiting()]),
    async close() {
      await Promise.all([...queues.values()].map((queue) => queue.close()));
      while (writing.size > 0) await Promise.all(writing);
    },
  };
}
