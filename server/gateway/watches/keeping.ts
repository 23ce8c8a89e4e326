import type { Settings } from '../../../shared-types/settings.ts';
import type { PruneRules, PruneStep, SwitchPin } from '../../store/pruneRules.ts';
import type { Store, StoredWatch } from '../../store/store.ts';
import type { Journal } from '../journal.ts';
import type { WatchMemo } from './runningWatch.ts';
import { checkpointOf, memoOf } from './storedWatch.ts';
import type { Watches } from './watches.ts';

/** Prunes what the settings let go, in the background. */
export interface Keeping {
  /** once a second */
  tick(): void;
  /** resolves once the step under way is done; nothing is pruned any more */
  close(): Promise<void>;
}

export interface KeepingNeeds {
  store: Store;
  settings: Pick<Settings, 'keepFor' | 'largestStore' | 'recordingGap'>;
  watches: Pick<Watches, 'model'>;
  journal: Pick<Journal, 'log'>;
  /** server clock, Unix seconds */
  serverTime(): number;
  warn(text: string): void;
}

/** Steps asked for at a time: each is short, and one commit serves them all. */
const STEPS_TOGETHER = 8;
/** Milliseconds between steps while there is: the store's thread serves the others meanwhile. */
const PAUSE_MILLISECONDS = 10;
/** Horizons before a switch and after it that stay. */
const HORIZONS_BEFORE = 3;
const HORIZONS_AFTER = 1;
/** What was pruned is told in the log at most this often, seconds. */
const TOLD_EVERY_SECONDS = 3600;

/** Keeping over a store; does nothing while the settings ask for nothing. */
export function createKeeping(needs: KeepingNeeds): Keeping {
  const { store, settings, serverTime } = needs;
  let under: Promise<void> | null = null;
  let closed = false;
  let toldAt = Number.NEGATIVE_INFINITY;
  let samples = 0;
  let channels = new Set<string>();
  let isShort = false;
  let complaint = '';

  const log = (text: string) =>
    needs.journal.log({ kind: 'server', channel: null, watch: null, by: null, text });

  const note = (step: PruneStep) => {
    samples += step.samples;
    for (const channel of step.channels) channels.add(channel);
    if (samples > 0 && !step.more && serverTime() - toldAt > TOLD_EVERY_SECONDS) {
      toldAt = serverTime();
      log(
        `the oldest ${samples} samples of ${[...channels].sort().join(', ')} were given up, as settings.json says`,
      );
      samples = 0;
      channels = new Set();
    }
    if (step.more || step.short > 0 === isShort) return;
    isShort = step.short > 0;
    if (!isShort) return;
    const text = shortWords(step, settings.largestStore!);
    log(text);
    needs.warn(text);
  };

  const failed = ({ code, message }: Error & { code?: string }) => {
    // a store that cannot write says so on the page already; either way it is tried again
    if (code === 'FULL' || code === 'CLOSED' || message === complaint) return;
    complaint = message;
    needs.warn(`old samples cannot be given up: ${message}`);
  };

  const prune = async () => {
    const rules = await rulesOf(needs);
    const ask = () => store.prune({ ...rules, now: serverTime() });
    // the first alone shows whether there is anything to do
    for (let together = 1; !closed; together = STEPS_TOGETHER) {
      const steps = await Promise.all(Array.from({ length: together }, ask));
      for (const step of steps) note(step);
      if (!steps.at(-1)!.more) return;
      await new Promise((resolve) => setTimeout(resolve, PAUSE_MILLISECONDS));
    }
  };

  return {
    tick() {
      if (settings.keepFor === null && settings.largestStore === null) return;
      if (under !== null || closed) return;
      under = prune()
        .catch(failed)
        .finally(() => {
          under = null;
        });
    },
    async close() {
      closed = true;
      await under;
    },
  };
}

const megabytes = (bytes: number) => `${Math.ceil(bytes / 1e6)} MB`;

const shortWords = ({ usedBytes }: PruneStep, ceiling: number): string =>
  `the database holds ${megabytes(usedBytes)}, more than largestStore (${megabytes(ceiling)}) in settings.json, and all ` +
  'that is left surrounds switches or is needed by a watch or model in use; raise largestStore, or take models out of use';

async function rulesOf({ store, settings, watches }: KeepingNeeds): Promise<Omit<PruneRules, 'now'>> {
  const rules: Omit<PruneRules, 'now'> = {
    keepFor: settings.keepFor,
    largestBytes: settings.largestStore,
    recordingGap: settings.recordingGap,
    switches: [],
    stretches: [],
    needed: [],
  };
  for (const stored of await store.watches()) {
    const memo = readable(() => memoOf(stored));
    // what cannot be read does not run either, and was said at the start
    if (memo === null) continue;
    const model = watches.model(memo.model);
    if (model !== null) rules.switches.push(pinOf(memo, model));
    if (memo.use === 'taken out of use') continue;
    for (const { name, from, to } of model?.provenance.recordings ?? []) {
      const channel = /^stored:([^/]+)/.exec(name)?.[1];
      if (channel !== undefined) rules.stretches.push({ channel, from, to });
    }
    rules.needed.push(...neededBy(stored, memo));
  }
  return rules;
}

type Ruled = NonNullable<ReturnType<Watches['model']>>;

function pinOf({ watch, channels }: WatchMemo, model: Ruled): SwitchPin {
  const { rule, regime, regimeChannel, delays, interval } = model;
  const horizon = rule?.horizon ?? delays * interval;
  const read = regime?.kind === 'marks' ? regime.channel : regimeChannel;
  return {
    watch,
    channels: read === null ? channels : [...channels, read],
    before: HORIZONS_BEFORE * horizon,
    after: HORIZONS_AFTER * horizon,
  };
}

/** A watch that has no snapshot yet begins with the first sample; one whose snapshot cannot be read begins anew. */
function neededBy(stored: StoredWatch, { channels }: WatchMemo): PruneRules['needed'] {
  if (stored.snapshot === null) return channels.map((channel) => ({ channel, ordinal: 0 }));
  const checkpoint = readable(() => checkpointOf(stored));
  return Object.entries(checkpoint?.ordinals ?? {}).map(([channel, ordinal]) => ({ channel, ordinal }));
}

function readable<T>(read: () => T): T | null {
  try {
    return read();
  } catch {
    return null;
  }
}
