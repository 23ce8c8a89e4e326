import type { Model, ModelSummary } from '../../../shared-types/model.ts';
import type { ActedOn, Warning } from '../../../shared-types/warning.ts';
import {
  NewWatch,
  type NewWatchToSend,
  type WatchAction,
  type WatchState,
} from '../../../shared-types/watch.ts';
import type { Store, StoredWatch } from '../../store/store.ts';
import type { Frame } from '../../watch/types.ts';
import { Refused } from '../refused.ts';
import { NO_ALARM } from './alarmState.ts';
import {
  type Checkpoint,
  createRunningWatch,
  type RunningWatch,
  type Surroundings,
  type WatchMemo,
} from './runningWatch.ts';
import { checkpointOf, memoOf } from './storedWatch.ts';

export interface WatchesNeeds extends Omit<Surroundings, 'save'> {
  store: Store;
  /** reads a model file; throws an error with a sentence */
  readModel(json: string): Model;
  /** hands the frames gathered so far to the store: what is written next comes after them */
  flushFrames(): void;
  failed(text: string): void;
}

export interface Watches {
  /** restores every stored watch and pushes what was stored after its snapshot */
  start(): Promise<void>;
  push(frame: Frame): void;
  tick(): void;
  add(asked: NewWatchToSend): Promise<WatchState>;
  /** a watch in the place of those in use on the same channels, with their time of reaction */
  replace(wanted: NewWatchToSend): Promise<WatchState>;
  /** stores a model under its name, or under a free one when that name has another content; returns the name */
  addModel(json: string): Promise<string>;
  act(watch: string, action: WatchAction): WatchState;
  /** says that a warning was acted on, or takes it back */
  actOn(warning: number, said: ActedOn): Warning;
  setUse(watch: string, use: WatchState['use']): WatchState;
  delivered(watch: string, warning: number): void;
  /** marks or conditions changed */
  leftOutChanged(): void;
  has(watch: string): boolean;
  state(watch: string): WatchState;
  states(): WatchState[];
  models(): ModelSummary[];
  modelJson(name: string): string | null;
  model(name: string): Model | null;
  /** writes snapshots and traces of what changed */
  saveProgress(): Promise<void>;
}

/** Samples read at a time when a watch catches up after a start. */
const REPLAY_SAMPLES = 8192;

function watchId(name: string, taken: (id: string) => boolean): string {
  const base =
    name
      .normalize('NFKD')
      .toLowerCase()
      .replace(/[^a-z0-9]+/g, '-')
      .replace(/^-+|-+$/g, '')
      .slice(0, 60) || 'watch';
  for (let n = 1; ; n++) {
    const id = n === 1 ? base : `${base}-${n}`;
    if (!taken(id)) return id;
  }
}

/** Pushes what the store has after a checkpoint, channels in step with each other. */
async function replay(running: RunningWatch, checkpoint: Checkpoint, store: Store): Promise<void> {
  const sources = Object.entries(checkpoint.ordinals).map(([channel, ordinal]) => ({
    channel,
    ordinal,
    block: null as Frame | null,
    end: false,
  }));
  for (;;) {
    for (const source of sources) {
      if (source.block || source.end) continue;
      const { times, values, next } = await store.samplesFrom(source.channel, source.ordinal, REPLAY_SAMPLES);
      source.ordinal = next;
      if (values.length === 0) source.end = true;
      else source.block = { channel: source.channel, t0: times[0]!, dt: 0, times, values };
    }
    const next = sources.filter(({ block }) => block).sort((a, b) => a.block!.t0 - b.block!.t0)[0];
    if (!next) return;
    running.push(next.block!);
    next.block = null;
  }
}

const beginsAnew = ({ name }: WatchMemo, found: string): string =>
  `what the watch "${name}" remembered is damaged (${found.split('\n')[0]}); it begins anew and is blind until its window is full`;

/** The running watches of a server and the models they use. */
export function createWatches(needs: WatchesNeeds): Watches {
  const { store, channels, journal } = needs;
  const running = new Map<string, RunningWatch>();
  const models = new Map<string, { json: string; model: Model }>();
  /** watches whose newest frame could not be pushed */
  const failing = new Set<string>();

  const around: Surroundings = {
    ...needs,
    save(watch: StoredWatch) {
      store
        .saveWatch(watch)
        .catch((error: Error) => needs.failed(`a watch is not being stored: ${error.message}`));
    },
  };
  const get = (id: string): RunningWatch => {
    const watch = running.get(id);
    if (watch) return watch;
    throw new Refused(404, 'NO_SUCH_WATCH', `there is no watch "${id}"; GET /api/watches lists them`);
  };

  const restore = async (stored: StoredWatch) => {
    const memo = memoOf(stored);
    const entry = models.get(memo.model);
    if (!entry) throw new Error(`its model "${memo.model}" is not in the store`);
    const since = memo.gradeSince ?? Number.NEGATIVE_INFINITY;
    const known = {
      warnings: (await store.warnings({ watch: memo.watch })).filter(({ at }) => at >= since),
      switches: (await store.switches({ watch: memo.watch })).filter(({ at }) => at >= since),
    };
    const resume = async () => {
      const checkpoint = checkpointOf(stored);
      for (const [channel, offset] of Object.entries(checkpoint?.offsets ?? {}))
        channels.restoreOffset(channel, offset);
      const watch = createRunningWatch(memo, entry.model, checkpoint, known, around);
      const from = checkpoint ?? { ...watch.checkpoint(), ordinals: everyOrdinal(watch) };
      if (memo.use !== 'taken out of use') await replay(watch, from, store);
      return watch;
    };
    const beginAnew = (error: Error & { code?: string }) => {
      if (error.code === 'SNAPSHOT_NEWER' || stored.snapshot === null) throw error;
      needs.failed(beginsAnew(memo, error.message));
      return createRunningWatch(memo, entry.model, null, known, around);
    };
    running.set(memo.watch, await resume().catch(beginAnew));
  };
  const pushTo = (watch: RunningWatch, frame: Frame) => {
    try {
      watch.push(frame);
      failing.delete(watch.memo.watch);
    } catch (error) {
      // what it remembered was spoilt where nothing could tell: the others and the recording go on
      const { memo } = watch;
      const { model } = models.get(memo.model)!;
      if (!failing.has(memo.watch)) needs.failed(beginsAnew(memo, (error as Error).message));
      failing.add(memo.watch);
      running.set(memo.watch, createRunningWatch(memo, model, null, { warnings: [], switches: [] }, around));
    }
  };
  /** without a snapshot nothing of the channels was seen yet */
  const everyOrdinal = (watch: RunningWatch) =>
    Object.fromEntries(Object.keys(watch.checkpoint().ordinals).map((name) => [name, 0]));

  const summary = (name: string, model: Model): ModelSummary => ({
    name,
    interval: model.interval,
    delays: model.delays,
    rank: model.rank,
    channels: model.channels.map(({ channel }) => channel),
    rule: model.rule,
    regime: model.regime,
    score: model.score,
    fittedAt: model.provenance.fittedAt,
    usedBy: [...running.values()]
      .filter(({ memo }) => memo.model === name && memo.use !== 'taken out of use')
      .map(({ memo }) => memo.watch),
  });

  const add = async (asked: NewWatchToSend): Promise<WatchState> => {
    const wanted = NewWatch.parse(asked);
    const entry = models.get(wanted.model);
    if (!entry)
      throw new Refused(
        404,
        'NO_SUCH_MODEL',
        `there is no model "${wanted.model}"; GET /api/models lists them`,
      );
    const expected = entry.model.channels.map(({ channel }) => channel);
    if (wanted.channels.length !== expected.length)
      throw new Refused(
        400,
        'OTHER_CHANNELS',
        `channels names ${wanted.channels.length}, the model has ${expected.length} (${expected.join('; ')}); name one for each`,
      );
    const name = wanted.name ?? `${wanted.model} on ${wanted.channels.join(', ')}`.slice(0, 80);
    const memo: WatchMemo = {
      watch: watchId(name, (id) => running.has(id)),
      name,
      model: wanted.model,
      channels: wanted.channels,
      reaction: wanted.reaction,
      use: wanted.use,
      alarm: wanted.latching ? { ...NO_ALARM, latching: true } : NO_ALARM,
      gradeSince: null,
      beganAt: needs.serverTime(),
    };
    let watch: RunningWatch;
    try {
      watch = createRunningWatch(memo, entry.model, null, { warnings: [], switches: [] }, around);
    } catch (error) {
      throw new Refused(400, 'CANNOT_WATCH', (error as Error).message);
    }
    running.set(memo.watch, watch);
    needs.flushFrames();
    await store.saveWatch({
      watch: memo.watch,
      settings: JSON.stringify(memo),
      snapshot: watch.firstSnapshot(),
    });
    journal.log({
      kind: 'watch',
      channel: memo.channels[0]!,
      watch: memo.watch,
      by: null,
      text: `"${name}" begins${wanted.use === 'on trial' ? ' on trial' : ''}`,
    });
    needs.touch(memo.watch);
    return watch.state();
  };

  return {
    async start() {
      for (const { name, json } of await store.models()) {
        try {
          models.set(name, { json, model: needs.readModel(json) });
        } catch (error) {
          needs.failed(`model "${name}" cannot be used: ${(error as Error).message}`);
        }
      }
      for (const stored of await store.watches()) {
        try {
          await restore(stored);
        } catch (error) {
          needs.failed(`watch "${stored.watch}" cannot run: ${(error as Error).message}`);
        }
      }
    },
    push(frame) {
      for (const watch of running.values()) {
        if (!watch.wants(frame.channel)) continue;
        pushTo(watch, frame);
        needs.touch(watch.memo.watch);
      }
    },
    tick() {
      for (const watch of running.values()) if (watch.memo.use !== 'taken out of use') watch.tick();
    },
    async addModel(json) {
      const model = needs.readModel(json);
      let name = model.name;
      for (let n = 2; models.has(name) && models.get(name)!.json !== json; n++) name = `${model.name} (${n})`;
      if (models.has(name)) return name;
      await store.saveModel(name, json);
      models.set(name, { json, model });
      journal.log({ kind: 'model', channel: null, watch: null, by: null, text: `model "${name}" added` });
      return name;
    },
    add,
    async replace(wanted) {
      const before = [...running.values()].filter(
        ({ memo }) => memo.use === 'in use' && memo.channels.join('\n') === wanted.channels.join('\n'),
      );
      const state = await add({ ...wanted, reaction: before[0]?.memo.reaction ?? 30, use: 'in use' });
      for (const old of before) old.setUse('taken out of use', `"${state.name}" takes over`);
      return state;
    },
    act(id, action) {
      const watch = get(id);
      watch.act(action);
      return watch.state();
    },
    actOn(id, said) {
      for (const watch of running.values()) {
        const warning = watch.actOn(id, said);
        if (warning !== null) return { ...warning };
      }
      throw new Refused(
        404,
        'NO_SUCH_WARNING',
        `there is no warning ${id} among the last ones of the running watches; GET /api/warnings lists them`,
      );
    },
    setUse(id, use) {
      const watch = get(id);
      watch.setUse(use);
      return watch.state();
    },
    leftOutChanged() {
      for (const watch of running.values()) watch.leftOutChanged();
    },
    delivered: (id, warning) => running.get(id)?.delivered(warning),
    has: (id) => running.has(id),
    state: (id) => get(id).state(),
    states: () => [...running.values()].map((watch) => watch.state()),
    models: () => [...models].map(([name, { model }]) => summary(name, model)),
    modelJson: (name) => models.get(name)?.json ?? null,
    model: (name) => models.get(name)?.model ?? null,
    async saveProgress() {
      const progress = [...running.values()].map((watch) => watch.progress()).filter((each) => each !== null);
      if (progress.length === 0) return;
      needs.flushFrames();
      await store.saveProgress(progress);
    },
  };
}
