import { Decoder } from 'cbor-x';
import type { Columns } from '../../../shared-types/channel.ts';
import type {
  RehearsalRequest,
  RehearsalResult,
  RehearsalState,
  RulePreview,
  SwitchCard,
} from '../../../shared-types/rehearsal.ts';
import { readStored, type StoredSamples } from '../../recordings/readStored.ts';
import { channelsRead } from '../../rehearsal/prepare.ts';
import { InputError } from '../../signal/inputError.ts';
import type { Store } from '../../store/store.ts';
import type { Journal } from '../journal.ts';
import { Refused } from '../refused.ts';
import { rehearsalCard } from './rehearsalCard.ts';
import type { DrawnTrace } from './rehearsalMessages.ts';
import { createHelper, type SearchThread, startSearch } from './rehearsalThreads.ts';
import { traceColumns } from './traceColumns.ts';

/** Rehearsals of stored recordings: searched one at a time beside the server's own work, kept with what they found. */
export interface Rehearsals {
  /** queues a search; what is wrong with its recordings is told by its state */
  start(request: RehearsalRequest): RehearsalState;
  /** newest first */
  states(): RehearsalState[];
  state(id: string): RehearsalState;
  stop(id: string): RehearsalState;
  /** CBOR of the result */
  bytes(id: string): Promise<Uint8Array>;
  result(id: string): Promise<RehearsalResult>;
  /** the chosen variable over recording `index` */
  columns(id: string, index: number, from: number, to: number, columns: number): Promise<Columns>;
  /** the card of switch `index` with a row of the table, the chosen one unless said */
  card(id: string, index: number, row: number | null): Promise<SwitchCard>;
  preview(recording: string, channel: string, regime: string): Promise<RulePreview>;
  proposal(recording: string, channel: string): Promise<{ rule: string; why: string } | null>;
  /** ends what runs */
  close(): Promise<void>;
}

export interface RehearsalNeeds {
  store: Store;
  journal: Journal;
  /** a recording is cut where nothing came for this long, seconds */
  gap: number;
  program: string;
  /** server clock, Unix seconds */
  serverTime(): number;
  /** changes whenever something else is left out */
  leftOutVersion(): number;
  /** hands the frames gathered so far to the store */
  flushFrames(): void;
  /** told what could not be stored */
  failed(text: string): void;
}

/** Finished rehearsals kept, here and in the store; searches that may wait. */
const KEPT = 12;
const MOST_WAITING = 5;
/** Decoded results and traces kept at hand. */
const AT_HAND = 3;
/** Below this share of the work its pace is not known. */
const PACE_KNOWN = 0.02;

const decoder = new Decoder({ mapsAsObjects: true, useRecords: false });

interface Entry {
  state: RehearsalState;
  /** null: in the store only, or nothing was found */
  bytes: Uint8Array | null;
}

/** Reads what is stored of earlier rehearsals. */
export async function createRehearsals(needs: RehearsalNeeds): Promise<Rehearsals> {
  const { store, journal } = needs;
  const entries = new Map<string, Entry>();
  for (const { id, state } of await store.rehearsals())
    entries.set(id, { state: JSON.parse(state) as RehearsalState, bytes: null });
  let nextId = 1 + Math.max(0, ...[...entries.keys()].map(Number));
  const queue: Entry[] = [];
  let running: { entry: Entry; thread: SearchThread | null } | null = null;
  let closing = false;
  const helper = createHelper();
  const results = createShelf<RehearsalResult>();
  const traces = createShelf<DrawnTrace>();

  const get = (id: string): Entry => {
    const entry = entries.get(id);
    if (entry) return entry;
    throw new Refused(
      404,
      'NO_SUCH_REHEARSAL',
      `there is no rehearsal "${id.slice(0, 60)}"; GET /api/rehearsals lists them`,
    );
  };
  const readRecording = (name: string, channels: readonly string[]): Promise<StoredSamples> => {
    if (!name.startsWith('stored:'))
      throw new InputError('NO_RECORDING', `"${name}" is not a stored recording; name one as stored:CHANNEL`);
    needs.flushFrames();
    return readStored(name, { store, gap: needs.gap, where: 'the store' }, channels);
  };

  const keyOf = (recording: string, channel: string) =>
    [needs.leftOutVersion(), recording, channel].join('\n');

  const begin = async (entry: Entry) => {
    const { request } = entry.state;
    const recordings: StoredSamples[] = [];
    for (const name of request.recordings) recordings.push(await readRecording(name, channelsRead(request)));
    if (entry.state.state !== 'running') return { kind: 'stopped' } as const;
    const started = needs.serverTime();
    const at = new Date(1000 * started).toISOString();
    const thread = startSearch({ request, recordings, program: needs.program, at }, (done, doing) => {
      if (entry.state.state !== 'running') return;
      const seconds = needs.serverTime() - started;
      entry.state.done = done;
      entry.state.doing = doing;
      entry.state.secondsLeft = done < PACE_KNOWN ? null : (seconds * (1 - done)) / done;
    });
    running!.thread = thread;
    return thread.ended;
  };

  const finish = async (entry: Entry, ending: Awaited<ReturnType<typeof begin>>) => {
    const { state } = entry;
    if (state.state !== 'running') return;
    state.secondsLeft = null;
    if (ending.kind === 'stopped') state.state = 'stopped';
    else if (ending.kind === 'failed') Object.assign(state, { state: 'failed', fault: ending.fault });
    else {
      const { sentence, verdict } = ending;
      entry.bytes = ending.result;
      Object.assign(state, { state: 'done', done: 1, doing: 'done', sentence, verdict });
      await keep(entry);
    }
    tell(entry);
  };
  const keep = async ({ state, bytes }: Entry) => {
    try {
      await store.saveRehearsal({ id: state.id, state: JSON.stringify(state), result: bytes! });
    } catch (error) {
      needs.failed(`a rehearsal is not being stored: ${(error as Error).message}`);
    }
  };
  const tell = ({ state }: Entry) => {
    const { id, request, verdict, sentence, fault } = state;
    const text = verdict === null ? (fault ?? state.state) : `${verdict.kind}: ${sentence}`;
    journal.log({
      kind: 'rehearsal',
      channel: request.channels[0]!,
      watch: null,
      by: null,
      text: `rehearsal ${id}: ${text}`,
    });
  };
  const prune = () => {
    const over = [...entries.values()].filter(({ state }) => state.state !== 'running');
    for (const { state } of over.slice(0, Math.max(0, over.length - KEPT))) {
      entries.delete(state.id);
      store
        .removeRehearsal(state.id)
        .catch((error: Error) => needs.failed(`a rehearsal could not be removed: ${error.message}`));
    }
  };

  const work = async () => {
    if (running !== null || closing) return;
    const entry = queue.shift();
    if (entry === undefined) return;
    running = { entry, thread: null };
    entry.state.doing = 'reading the recordings';
    try {
      await finish(entry, await begin(entry));
    } catch (error) {
      await finish(entry, { kind: 'failed', fault: (error as Error).message });
    }
    running = null;
    prune();
    void work();
  };

  const bytes = async (id: string): Promise<Uint8Array> => {
    const entry = get(id);
    const found = entry.bytes ?? (entry.state.state === 'done' ? await store.rehearsalResult(id) : null);
    if (found !== null) return found;
    const { state, fault } = entry.state;
    const why =
      state === 'running' ? 'is not done yet; wait, or stop it' : `${state}${fault ? `: ${fault}` : ''}`;
    throw new Refused(409, 'NO_RESULT', `rehearsal ${id} ${why}`);
  };
  const result = (id: string): Promise<RehearsalResult> =>
    results.get(id, async () => decoder.decode(await bytes(id)) as RehearsalResult);
  const recordingOf = ({ recordings }: RehearsalResult, index: number) => {
    const found = recordings[index];
    if (found !== undefined) return found;
    throw new Refused(
      404,
      'NOT_THERE',
      `there is no recording ${index} in this rehearsal; it has ${recordings.length}, counted from 0`,
    );
  };

  return {
    start(request) {
      // what is wrong with the rule is told at once
      channelsRead(request);
      if (queue.length >= MOST_WAITING)
        throw new Refused(429, 'TOO_MANY', `${queue.length} rehearsals wait already; stop one, or wait`);
      const id = String(nextId++);
      const state: RehearsalState = {
        id,
        request,
        state: 'running',
        done: 0,
        doing: 'waiting for the rehearsal before it',
        secondsLeft: null,
        fault: null,
        startedAt: needs.serverTime(),
        sentence: null,
        verdict: null,
      };
      const entry = { state, bytes: null };
      entries.set(id, entry);
      queue.push(entry);
      void work();
      return { ...state };
    },
    states: () => [...entries.values()].map(({ state }) => ({ ...state })).reverse(),
    state: (id) => ({ ...get(id).state }),
    stop(id) {
      const entry = get(id);
      if (entry.state.state === 'running') {
        Object.assign(entry.state, { state: 'stopped', secondsLeft: null });
        const place = queue.indexOf(entry);
        if (place !== -1) queue.splice(place, 1);
        else if (running?.entry === entry) running.thread?.stop();
        tell(entry);
      }
      return { ...entry.state };
    },
    bytes,
    result,
    async columns(id, index, from, to, columns) {
      const found = await result(id);
      const recording = recordingOf(found, index);
      const key = `${id} ${index}`;
      const trace = await traces.get(key, () =>
        helper.ask<'trace'>(`trace ${key}`, () => readRecording(recording.name, found.request.channels), {
          kind: 'trace',
          model: found.model,
          channels: found.request.channels,
          to: recording.to,
          leftOut: found.leftOut.filter((one) => one.recording === index),
        }),
      );
      return traceColumns(trace, from, to, columns);
    },
    card: async (id, index, row) => rehearsalCard(await result(id), index, row, store),
    preview: (recording, channel, regime) =>
      helper.ask<'preview'>(keyOf(recording, channel), () => readRecording(recording, [channel]), {
        kind: 'preview',
        channel,
        regime,
      }),
    proposal: (recording, channel) =>
      helper.ask<'proposal'>(keyOf(recording, channel), () => readRecording(recording, [channel]), {
        kind: 'proposal',
        channel,
      }),
    async close() {
      closing = true;
      for (const { state } of entries.values()) if (state.state === 'running') state.state = 'stopped';
      running?.thread?.stop();
      await running?.thread?.ended;
      await helper.close();
    },
  };
}

/** A few values at hand, made when they are first asked for; what could not be made is asked for again. */
function createShelf<V>() {
  const shelf = new Map<string, Promise<V>>();
  return {
    get(key: string, make: () => Promise<V>): Promise<V> {
      const known = shelf.get(key);
      if (known !== undefined) return known;
      const made = make();
      shelf.set(key, made);
      made.catch(() => shelf.delete(key));
      while (shelf.size > AT_HAND) shelf.delete(shelf.keys().next().value!);
      return made;
    },
  };
}
