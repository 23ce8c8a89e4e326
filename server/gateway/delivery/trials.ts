import { randomUUID } from 'node:crypto';
import type { DelayPart, MeasuredDelay, Trial, TrialSeen } from '../../../shared-types/delivery.ts';
import type { FeedMessage } from '../../../shared-types/feed.ts';
import type { WatchState } from '../../../shared-types/watch.ts';
import type { FrameToStore, Store } from '../../store/store.ts';
import type { Moment } from '../channels/channels.ts';
import type { TrialMark } from '../ingest/ingestFrame.ts';
import type { Journal } from '../journal.ts';
import { Refused } from '../refused.ts';
import { trialEvent } from './cloudEvent.ts';
import {
  type ChannelFindings,
  deliveryPart,
  networkPart,
  notMeasured,
  type PageFindings,
  pageParts,
  programPart,
  rigPart,
  secondsText,
  totalOf,
} from './delayParts.ts';
import type { Deliveries } from './delivery.ts';
import type { OpenReceiver } from './receivers.ts';

/** A producer as a trial needs it. */
export interface TrialProducer {
  ask(trial: string, channel: string): void;
  roundTrip(): Promise<number | null>;
}

export interface TrialsNeeds {
  store: Store;
  journal: Pick<Journal, 'log'>;
  deliveries: Pick<Deliveries, 'receivers' | 'source'>;
  now(): Moment;
  watch(watch: string): WatchState;
  /** null: nobody sends to the channel now */
  producer(channel: string): TrialProducer | null;
  interval(channel: string): number | null;
  say(message: FeedMessage): void;
}

/** Measures how late a warning comes to a person. A trial is no warning: it is graded nowhere and stores no sample. */
export interface Trials {
  /** one at a time for a watch: who asks meanwhile gets the same answer. @throws Refused */
  run(watch: string, by: string): Promise<MeasuredDelay>;
  /** every frame taken, after the watches have read it; `arrival`: server clock */
  took(frame: FrameToStore, arrival: number, mark: TrialMark | null): void;
  /** a page was told of a trial */
  told(trial: string): void;
  /** a page has shown it */
  seen(said: TrialSeen): void;
}

/** A producer that has not answered for so long does not know of trials; longer where frames come more rarely. */
const ANSWER_SECONDS = 4;
const ANSWER_INTERVALS = 4;
const LONGEST_ANSWER_SECONDS = 60;
const PAGE_SECONDS = 3;
const WEBHOOK_SECONDS = 10;
/** of so many pings the median counts */
const PINGS = 5;

/** A trial under way. */
interface Running {
  id: string;
  channels: Map<string, ChannelFindings>;
  frameCame(): void;
  pages: { sentAt: number; told: number; echoes: PageFindings[]; echoed(): void } | null;
}

const medianOf = (sorted: number[]): number | null => sorted[sorted.length >> 1] ?? null;

async function usualRoundTrip(producer: TrialProducer): Promise<number | null> {
  const trips: number[] = [];
  for (let i = 0; i < PINGS; i++) {
    const trip = await producer.roundTrip();
    if (trip === null) break;
    trips.push(trip);
  }
  return medianOf(trips.sort((a, b) => a - b));
}

/** Resolves once `ready` holds when looked at, at the latest after `seconds`; `arm` is given what looks again. */
function waitUntil(seconds: number, ready: () => boolean, arm: (look: () => void) => void): Promise<void> {
  return new Promise((resolve) => {
    const limit = setTimeout(resolve, 1000 * seconds);
    const look = () => {
      if (!ready()) return;
      clearTimeout(limit);
      resolve();
    };
    arm(look);
    look();
  });
}

function sentence(delay: MeasuredDelay, name: string): string {
  const parts = (['rig', 'network', 'program', 'delivery'] as const).map((part) => {
    const { seconds } = delay[part];
    return `${part} ${seconds === null ? 'not measured' : secondsText(seconds)}`;
  });
  const left =
    delay.left === null
      ? ''
      : delay.left > 0
        ? `; of the least lead ${secondsText(delay.left)} are left`
        : '; nothing of the least lead is left';
  const silent = delay.answered ? '' : '; the producer did not answer';
  return `trial: what "${name}" warns of comes ${secondsText(delay.total)} late (${parts.join(', ')})${left}${silent}`;
}

export function createTrials(needs: TrialsNeeds): Trials {
  const { store, now, deliveries } = needs;
  const running = new Map<string, Running>();
  const asked = new Map<string, Promise<MeasuredDelay>>();

  const askProducers = async (state: WatchState, trial: Running): Promise<void> => {
    const producers = state.channels.map((channel) => [channel, needs.producer(channel)] as const);
    for (const [channel, producer] of producers) {
      if (producer === null)
        throw new Refused(
          409,
          'NO_PRODUCER',
          `nothing sends to "${channel}" now, so no delay can be measured; start its producer and try again`,
        );
      trial.channels.set(channel, { channel, answer: null, newest: null, program: null, roundTrip: null });
    }
    const longest = Math.max(...state.channels.map((channel) => needs.interval(channel) ?? 0));
    const seconds = Math.min(LONGEST_ANSWER_SECONDS, Math.max(ANSWER_SECONDS, ANSWER_INTERVALS * longest));
    const answered = waitUntil(
      seconds,
      () => [...trial.channels.values()].every(({ answer }) => answer !== null),
      (look) => {
        trial.frameCame = look;
      },
    );
    for (const [channel, producer] of producers) producer!.ask(trial.id, channel);
    const trips = producers.map(async ([channel, producer]) => {
      trial.channels.get(channel)!.roundTrip = await usualRoundTrip(producer!);
    });
    await Promise.all([answered, ...trips]);
  };

  const askPages = async (trial: Running, told: Trial) => {
    trial.pages = { sentAt: now().monotonic, told: 0, echoes: [], echoed: () => {} };
    const { pages } = trial;
    needs.say({ kind: 'trial', trial: told });
    await waitUntil(
      PAGE_SECONDS,
      () => pages.echoes.length >= pages.told,
      (look) => {
        pages.echoed = look;
      },
    );
    return pageParts(pages.echoes, pages.told);
  };

  const askWebhook = async (receiver: OpenReceiver, state: WatchState, trial: string) => {
    const [began, madeAt] = [now().monotonic, now().server];
    const event = trialEvent(
      trial,
      state,
      state.channels,
      deliveries.source,
      madeAt,
      madeAt + WEBHOOK_SECONDS,
    );
    const came = await receiver.send(JSON.stringify(event), AbortSignal.timeout(1000 * WEBHOOK_SECONDS));
    const seconds = now().monotonic - began;
    const reached = came.kind === 'delivered';
    store
      .saveDelivery({
        id: 0,
        receiver: receiver.name,
        kind: 'trial',
        event: event.id,
        watch: state.watch,
        warning: 0,
        madeAt,
        state: reached ? 'delivered' : 'given up',
        attempts: 1,
        settledAt: now().server,
        text: came.text,
        body: '',
        until: madeAt,
      })
      // the store's trouble is told by who records samples
      .catch(() => {});
    const part: DelayPart = reached
      ? { seconds, how: 'measured', text: `until it ${came.text}` }
      : notMeasured(`it ${came.text}`);
    return { ...part, receiver: receiver.name };
  };

  const measure = async (watch: string, by: string): Promise<MeasuredDelay> => {
    const state = needs.watch(watch);
    if (state.use === 'taken out of use')
      throw new Refused(
        409,
        'NOT_IN_USE',
        `"${state.name}" is taken out of use and reads no samples; put it into use and try again`,
      );
    const id = randomUUID();
    const trial: Running = { id, channels: new Map(), frameCame: () => {}, pages: null };
    running.set(id, trial);
    try {
      await askProducers(state, trial);
      const channel = [...trial.channels.values()].sort(
        (a, b) => totalOf([rigPart(b), networkPart(b)]) - totalOf([rigPart(a), networkPart(a)]),
      )[0]!;
      const hearing = deliveries.receivers.filter(
        ({ trials, hears }) => trials && hears(state.watch, state.name),
      );
      const [{ page, tone }, webhooks] = await Promise.all([
        askPages(trial, { id, watch, channel: channel.channel }),
        Promise.all(hearing.map((receiver) => askWebhook(receiver, state, id))),
      ]);
      const parts = {
        rig: rigPart(channel),
        network: networkPart(channel),
        program: programPart(channel),
        delivery: deliveryPart(page, tone, webhooks),
      };
      const total = totalOf(Object.values(parts));
      const leastLead = state.rule?.leastLead ?? null;
      return {
        watch,
        trial: id,
        at: now().server,
        by,
        answered: [...trial.channels.values()].every(({ answer }) => answer !== null),
        ...parts,
        page,
        tone,
        webhooks,
        total,
        leastLead,
        left: leastLead === null ? null : leastLead - total,
      };
    } finally {
      running.delete(id);
    }
  };

  const keep = async (delay: MeasuredDelay): Promise<MeasuredDelay> => {
    const state = needs.watch(delay.watch);
    needs.say({ kind: 'delay', delay });
    needs.journal.log({
      kind: 'delivery',
      channel: state.channels[0]!,
      watch: delay.watch,
      by: delay.by,
      text: sentence(delay, state.name),
    });
    await store.saveDelay(delay);
    return delay;
  };

  return {
    run(watch, by) {
      const same = asked.get(watch);
      if (same !== undefined) return same;
      const result = measure(watch, by)
        .then(keep)
        .finally(() => asked.delete(watch));
      asked.set(watch, result);
      return result;
    },
    took(frame, arrival, mark) {
      if (running.size === 0) return;
      const program = now().server - arrival;
      for (const trial of running.values()) {
        const findings = trial.channels.get(frame.channel);
        if (findings === undefined || findings.answer !== null) continue;
        findings.newest = { frame, arrival };
        findings.program = program;
        if (mark?.trial === trial.id) findings.answer = { frame, sentAt: mark.sentAt };
        trial.frameCame();
      }
    },
    told(trial) {
      const pages = running.get(trial)?.pages;
      if (pages) pages.told++;
    },
    seen({ trialSeen, painted, tone, held }) {
      const pages = running.get(trialSeen)?.pages;
      if (!pages) return;
      // the page's own time is no part of the way; half of the rest is the way there
      const way = Math.max(0, (now().monotonic - pages.sentAt - held) / 2);
      pages.echoes.push({ way, painted, tone });
      pages.echoed();
    },
  };
}
