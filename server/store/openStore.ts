import { mkdirSync } from 'node:fs';
import { ChannelDescription } from '../../shared-types/channel.ts';
import { createLeftOutRecords, createRehearsalRecords, readLeftOut } from './annotations.ts';
import { createGroupCommit } from './groupCommit.ts';
import { claimFolder } from './lock.ts';
import { createLogbook } from './logbook.ts';
import { noteDamage, openDatabase, openDatabaseReader } from './openDatabase.ts';
import { createOutbox } from './outbox.ts';
import { createPruner } from './pruning.ts';
import { createReadings, type Readings } from './readings.ts';
import { createRecords } from './records.ts';
import { createRuns } from './runs.ts';
import type { FrameToStore, Store, StoreReader, WatchProgress } from './store.ts';
import { createTails } from './tails.ts';

/** How a store is opened. */
export interface StoreOptions {
  /** seconds between commits */
  commitEvery: number;
  /** the database stops growing at this many bytes (FULL); left out: at what the disk holds */
  largestBytes?: number;
  /** the server's clock, Unix seconds, for when samples arrived; left out: the system's */
  now?: () => number;
}

/**
 * Opens the store of a data folder in this thread; folder and database are made where there are none. See `Store`.
 *
 * @throws StoreError IN_USE while another server writes to the folder, NEWER where a newer program wrote it
 */
export function openStore(dataFolder: string, options: StoreOptions): Store & { failures(): number } {
  mkdirSync(dataFolder, { recursive: true });
  const release = claimFolder(dataFolder);
  const notices: string[] = [];
  try {
    return storeOver(openDatabase(dataFolder, notices), options, notices, release, () =>
      noteDamage(dataFolder),
    );
  } catch (fault) {
    release();
    throw fault;
  }
}

function storeOver(
  database: ReturnType<typeof openDatabase>,
  options: StoreOptions,
  notices: string[],
  release: () => void,
  damaged: () => void,
): Store & { failures(): number } {
  if (options.largestBytes !== undefined) {
    const page = database.pragma('page_size', { simple: true }) as number;
    database.pragma(`max_page_count = ${Math.floor(options.largestBytes / page)}`);
  }
  const tails = createTails(database);
  const runs = createRuns(database);
  const records = createRecords(database);
  const logbook = createLogbook(database);
  const leftOut = createLeftOutRecords(database);
  const rehearsals = createRehearsalRecords(database);
  const outbox = createOutbox(database);
  const readings = createReadings(database);
  const pruner = createPruner(database);
  const now = options.now ?? (() => Date.now() / 1000);
  const describe = database.prepare('UPDATE series SET description = ? WHERE id = ?');
  const countHoles = database.prepare('UPDATE series SET holes = holes + ? WHERE id = ?');
  const countGaps = database.prepare('UPDATE series SET gaps = gaps + ? WHERE id = ?');
  const { write, read, close, failures } = createGroupCommit(database, options.commitEvery, {
    flush: () => {
      pruner.noteArrival(now());
      tails.flush();
      runs.flush();
    },
    forget: () => {
      tails.forget();
      runs.forget();
      pruner.forget();
    },
    damaged,
  });

  // what the store refuses is refused before anything of the call is applied
  const append = (frames: FrameToStore[]): void => {
    for (const frame of frames) tails.check(frame.channel, frame);
    for (const frame of frames)
      if (
        frame.run === '' ||
        frame.seq < 0 ||
        runs.consume(frame.channel, frame.run, frame.seq, frame.digest)
      )
        tails.append('channel', frame.channel, frame);
  };
  const progress = (all: WatchProgress[]): void => {
    const samples = all.map(({ trace }) => (trace === null ? null : { ...trace, t0: 0, dt: 0 }));
    all.forEach(({ watch }, index) => {
      records.requireWatch(watch);
      if (samples[index] != null) tails.check(watch, samples[index]);
    });
    all.forEach(({ watch, snapshot }, index) => {
      records.saveSnapshot(watch, snapshot);
      if (samples[index] != null) tails.append('trace', watch, samples[index]);
    });
  };

  return {
    notices,
    failures,
    saveChannel: (channel) =>
      write(() => {
        describe.run(
          JSON.stringify(ChannelDescription.parse(channel)),
          tails.series('channel', channel.channel),
        );
      }),
    appendFrames: (frames) => write(() => append(frames)),
    countFault: (channel, fault, count) =>
      write(() => {
        (fault === 'hole' ? countHoles : countGaps).run(count, tails.series('channel', channel));
      }),
    run: (channel, run) => read(() => runs.get(channel, run)),
    skipFrame: (channel, run, seq, digest) =>
      write(() => {
        runs.consume(channel, run, seq, digest);
      }),
    ...readMethods(readings, read),
    saveModel: (name, json) => write(() => records.saveModel(name, json)),
    model: (name) => read(() => records.model(name)),
    models: () => read(() => records.models()),
    saveWatch: (watch) => write(() => records.saveWatch(watch)),
    watches: () => read(() => records.watches()),
    saveProgress: (all) => write(() => progress(all)),
    saveWarning: (warning) => write(() => records.saveWarning(warning)),
    warnings: (query) => read(() => records.warnings(query)),
    saveSwitch: (event) => write(() => records.saveSwitch(event)),
    switches: (query) => read(() => records.switches(query)),
    log: (entry) => write(() => records.log(entry)),
    logEntries: (query) => read(() => records.logEntries(query)),
    logbook: (query) => read(() => logbook(query)),
    saveMark: (mark) => write(() => leftOut.saveMark(mark)),
    removeMark: (id) => write(() => leftOut.removeMark(id)),
    marks: () => read(() => leftOut.marks()),
    saveCondition: (condition) => write(() => leftOut.saveCondition(condition)),
    removeCondition: (id) => write(() => leftOut.removeCondition(id)),
    conditions: () => read(() => leftOut.conditions()),
    saveRehearsal: (rehearsal) => write(() => rehearsals.saveRehearsal(rehearsal)),
    removeRehearsal: (id) => write(() => rehearsals.removeRehearsal(id)),
    rehearsals: () => read(() => rehearsals.rehearsals()),
    rehearsalResult: (id) => read(() => rehearsals.rehearsalResult(id)),
    saveDelivery: (delivery) => write(() => outbox.saveDelivery(delivery)),
    deliveries: (query) => read(() => outbox.deliveries(query)),
    pendingDeliveries: () => read(() => outbox.pendingDeliveries()),
    saveDelay: (delay) => write(() => outbox.saveDelay(delay)),
    delay: (watch) => read(() => outbox.delay(watch)),
    prune: (rules) =>
      write(() => {
        tails.flush();
        return pruner.step(rules, tails.readAnew);
      }),
    close: async () => {
      await close();
      if (!database.open) return;
      database.close();
      release();
    },
  };
}

type Reading = <T>(question: () => T) => Promise<T>;

type SampleReadings = Omit<StoreReader, 'model' | 'models' | 'marks' | 'conditions' | 'close'>;

function readMethods(readings: Readings, read: Reading): SampleReadings {
  return {
    channels: () => read(() => readings.channels()),
    samplesFrom: (channel, ordinal, most) => read(() => readings.samplesFrom(channel, ordinal, most)),
    samplesBetween: (channel, from, to) => read(() => readings.samplesBetween(channel, from, to)),
    signalColumns: (channel, from, to, columns) =>
      read(() => readings.columns('channel', channel, from, to, columns)),
    traceColumns: (watch, from, to, columns) =>
      read(() => readings.columns('trace', watch, from, to, columns)),
    recordings: (gapSeconds) => read(() => readings.recordings(gapSeconds)),
  };
}

/**
 * Opens what a data folder holds for reading only, also while a server writes to it; every answer is of one moment.
 *
 * @throws StoreError NO_STORE where there is none, NEWER where a newer program wrote it
 */
export function openStoreReader(dataFolder: string): StoreReader {
  const database = openDatabaseReader(dataFolder);
  const readings = createReadings(database);
  const records = createRecords(database);
  const leftOut = readLeftOut(database);
  const read: Reading = async (question) => database.transaction(question)();
  return {
    ...readMethods(readings, read),
    model: (name) => read(() => records.model(name)),
    models: () => read(() => records.models()),
    marks: () => read(() => leftOut.marks()),
    conditions: () => read(() => leftOut.conditions()),
    close: async () => {
      database.close();
    },
  };
}
