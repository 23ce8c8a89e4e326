import { Decoder, Encoder } from 'cbor-x';
import type { Model } from '../../shared-types/model.ts';
import type { SwitchEvent, Warning } from '../../shared-types/warning.ts';
import type { WatchAction, WatchState } from '../../shared-types/watch.ts';
import type { StoredWatch, WatchProgress } from '../store/store.ts';
import {
  createLeftOutGate,
  type GateCondition,
  type GateMark,
  type GateState,
} from '../watch/leftOutGate.ts';
import type { Frame, Happening, Steps, Watch, WatchSettings, WatchSnapshot } from '../watch/types.ts';
import { type Alarm, type AlarmEvent, alarmAfter, alarmStateOf, shelfIsOver } from './alarmState.ts';
import type { Channels } from './channels.ts';
import type { Journal } from './journal.ts';
import { createTally, liveScore, tallySwitch, tallyWarning } from './liveScore.ts';

/** A watch as its settings are stored: JSON. */
export interface WatchMemo {
  watch: string;
  name: string;
  model: string;
  channels: string[];
  /** below this least lead (seconds) nobody is asked to acknowledge */
  reaction: number;
  use: WatchState['use'];
  alarm: Alarm;
  /** channel time the live grade counts from; null until the first frame */
  gradeSince: number | null;
}

/** What a watch's snapshot is stored with, so that what arrived after it can be pushed again. */
export interface Checkpoint {
  snapshot: WatchSnapshot;
  /** ordinal of the first sample of each channel that is not in the snapshot */
  ordinals: Record<string, number>;
  /** least offset of each channel's clock, see clockOffset.ts */
  offsets: Record<string, number | null>;
  /** what is known of the conditions under which samples are left out; absent before there were any */
  gate?: GateState;
}

/** What a running watch needs of its surroundings. */
export interface Surroundings {
  channels: Channels;
  journal: Journal;
  /** server clock, Unix seconds */
  serverTime(): number;
  createWatch(settings: WatchSettings, snapshot?: WatchSnapshot): Watch;
  /** what a watch of these channels has to leave out */
  leftOut(channels: readonly string[]): { marks: GateMark[]; conditions: GateCondition[] };
  /** nothing has come on the channel for longer than is usual, or it is not known */
  silent(channel: string): boolean;
  /** the settings changed and must be stored */
  save(watch: StoredWatch): void;
  /** the state changed and pages should have it */
  touch(watch: string): void;
  /** new steps of the variable; the arrays are the receiver's own */
  traced(watch: string, times: Float64Array, values: Float64Array): void;
}

export interface RunningWatch {
  readonly memo: WatchMemo;
  wants(channel: string): boolean;
  push(frame: Frame): void;
  /** once a second or so: shelves that end, spans that run out, the grade */
  tick(): void;
  act(action: WatchAction): void;
  /** `why` for the log */
  setUse(use: WatchState['use'], why?: string): void;
  /** marks or conditions changed: from now on they are as they are now */
  leftOutChanged(): void;
  /** the first page has it */
  delivered(warning: number): void;
  /** what to store now, or null when nothing changed since */
  progress(): WatchProgress | null;
  checkpoint(): Checkpoint;
  /** snapshot of a watch that is about to be stored for the first time */
  firstSnapshot(): Uint8Array;
  state(): WatchState;
}

const encoder = new Encoder({ useRecords: false });
const decoder = new Decoder({ mapsAsObjects: true, useRecords: false });

/** Warnings kept in memory of each watch, to know them again in a replay and to settle them. */
const WARNINGS_KEPT = 2000;

export const readCheckpoint = (bytes: Uint8Array): Checkpoint => decoder.decode(bytes) as Checkpoint;

/** A trace on its way to the store: grows, is emptied once a second. */
function createTraceBuffer() {
  let times = new Float64Array(1024);
  let values = new Float64Array(1024);
  let count = 0;
  return {
    add(steps: Steps) {
      if (count + steps.count > times.length) {
        const length = Math.max(2 * times.length, count + steps.count);
        const [longerTimes, longerValues] = [new Float64Array(length), new Float64Array(length)];
        longerTimes.set(times.subarray(0, count));
        longerValues.set(values.subarray(0, count));
        times = longerTimes;
        values = longerValues;
      }
      times.set(steps.time.subarray(0, steps.count), count);
      values.set(steps.value.subarray(0, steps.count), count);
      count += steps.count;
    },
    empty() {
      const trace = count === 0 ? null : { times: times.slice(0, count), values: values.slice(0, count) };
      count = 0;
      return trace;
    },
  };
}

/**
 * Runs one watch: pushes frames into it, makes warnings, switches, log entries and alarm states of what it says, and
 * keeps what the page shows. Warnings and switches it has already told (a replay after a restart) are not told again.
 *
 * @param checkpoint where to go on; null: from now
 * @param known      the watch's warnings and switches in the store, oldest first
 */
export function createRunningWatch(
  memo: WatchMemo,
  model: Model,
  checkpoint: Checkpoint | null,
  known: { warnings: Warning[]; switches: SwitchEvent[] },
  around: Surroundings,
): RunningWatch {
  const settings: WatchSettings = {
    model,
    channels: memo.channels,
    rule: model.rule,
    regime: model.regime,
    // A model's own channel names mean the channels it is put on.
    regimeChannel: placedChannel(model, memo.channels),
  };
  const { rule } = model;
  const trigger = rule !== null && rule.leastLead < memo.reaction;
  let watch = around.createWatch(settings, checkpoint?.snapshot);
  let wanted = watch.wants();
  let gate = createLeftOutGate(wanted, checkpoint?.gate);
  const happenings: Happening[] = [];
  const trace = createTraceBuffer();
  const warnings = new Map<number, Warning>();
  const switchesToldAt = new Set<number>();
  let tally = createTally();
  let snapshotBytes: Uint8Array | null = null;
  let dirty = false;
  let value: number | null = null;
  let at: number | null = null;
  let spanEnd = Number.NEGATIVE_INFINITY;
  let grade: WatchState['grade'] = null;
  let graded = false;

  const remember = (warning: Warning) => {
    warnings.set(warning.at, warning);
    if (warning.outcome === 'open') spanEnd = Math.max(spanEnd, warning.to);
    if (warnings.size > WARNINGS_KEPT) warnings.delete(warnings.keys().next().value!);
  };
  for (const warning of known.warnings) {
    remember(warning);
    tallyWarning(tally, warning, 1);
  }
  for (const event of known.switches) {
    switchesToldAt.add(event.at);
    tallySwitch(tally, event);
  }

  const save = () =>
    around.save({ watch: memo.watch, settings: JSON.stringify(memo), snapshot: snapshotBytes });
  const apply = (event: AlarmEvent) => {
    const before = memo.alarm;
    memo.alarm = alarmAfter(before, event);
    if (memo.alarm === before) return;
    save();
    around.touch(memo.watch);
  };
  const log = (
    kind: Parameters<Journal['log']>[0]['kind'],
    text: string,
    channel: string | null = null,
    by: string | null = null,
  ) => around.journal.log({ kind, channel, watch: memo.watch, by, text });

  const channelNow = () => around.channels.time(memo.channels[0]!, around.serverTime());

  const warn = (happening: Extract<Happening, { kind: 'warning' }>) => {
    if (warnings.has(happening.at) || !rule) return;
    const now = Math.max(
      channelNow() ?? happening.at,
      around.channels.newest(memo.channels[0]!) ?? happening.at,
    );
    const [from, to] = [happening.at + rule.leastLead, happening.at + rule.horizon];
    const warning: Warning = {
      id: 0,
      watch: memo.watch,
      model: memo.model,
      channels: memo.channels,
      at: happening.at,
      from,
      to,
      madeAt: around.serverTime(),
      deliveredAt: null,
      variable: rule.variable,
      value: happening.value,
      threshold: happening.threshold,
      outcome: 'open',
      switchAt: null,
      lead: null,
      acknowledgedAt: null,
      acknowledgedBy: null,
      quiet: now > from,
    };
    remember(warning);
    tallyWarning(tally, warning, 1);
    around.journal.issue(warning);
    if (now <= to && memo.use === 'in use') apply({ kind: 'warning', id: warning.id, trigger });
  };

  const settle = (happening: Extract<Happening, { kind: 'graded' }>) => {
    const warning = warnings.get(happening.at);
    if (warning?.outcome !== 'open') return;
    tallyWarning(tally, warning, -1);
    warning.outcome = happening.outcome;
    warning.switchAt = happening.switchAt;
    warning.lead = happening.lead;
    tallyWarning(tally, warning, 1);
    around.journal.change(warning);
  };

  const switched = (happening: Extract<Happening, { kind: 'switch' }>) => {
    if (memo.alarm.active && happening.at >= spanEnd - (rule?.horizon ?? 0)) over();
    if (switchesToldAt.has(happening.at)) return;
    switchesToldAt.add(happening.at);
    const { kind: _, warningAt, ...told } = happening;
    const event: SwitchEvent = {
      ...told,
      id: 0,
      watch: memo.watch,
      channel: settings.regimeChannel ?? memo.channels[0]!,
      loggedAt: around.serverTime(),
      warning: warningAt === null ? null : (warnings.get(warningAt)?.id ?? null),
    };
    tallySwitch(tally, event);
    around.journal.noteSwitch(event);
  };

  const over = () => {
    spanEnd = Number.NEGATIVE_INFINITY;
    apply({ kind: 'over' });
  };

  const tell = (happening: Happening) => {
    switch (happening.kind) {
      case 'warning':
        return warn(happening);
      case 'graded':
        return settle(happening);
      case 'switch':
        return switched(happening);
      case 'gap': {
        const seconds = Number((happening.to - happening.from).toPrecision(3));
        return log(
          'gap',
          `${leftOutWords(gate.why(happening.from, happening.to)) ?? 'no sample'} for ${seconds} s; blind until the window is full again`,
          happening.channel,
        );
      }
      case 'likeness': {
        const words = {
          like: 'the data look like the model again',
          unlike: 'the data do not look like the model',
          'not known': 'whether the data look like the model is not known',
        };
        return log('likeness', words[happening.likeness.kind], memo.channels[0]!);
      }
    }
  };

  const noteSteps = (steps: Steps) => {
    if (steps.count === 0) return;
    trace.add(steps);
    around.traced(memo.watch, steps.time.slice(0, steps.count), steps.value.slice(0, steps.count));
    const newest = steps.value[steps.count - 1]!;
    value = Number.isNaN(newest) ? null : newest;
    at = steps.newest[steps.count - 1]!;
    if (memo.alarm.active && at > spanEnd) over();
  };

  const updateGrade = () => {
    graded = true;
    grade =
      rule === null || model.regime === null
        ? null
        : liveScore(tally, {
            seconds: watch.watchedSeconds(),
            covered: watch.coveredSeconds(),
            interval: model.interval,
            leastLead: rule.leastLead,
            horizon: rule.horizon,
          });
  };

  const checkpointNow = (): Checkpoint => ({
    snapshot: watch.snapshot(),
    ordinals: Object.fromEntries(
      reads().map((name) => [name, around.channels.samples(name) - gate.waiting(name)]),
    ),
    offsets: Object.fromEntries(reads().map((name) => [name, around.channels.leastOffset(name)])),
    gate: gate.state(),
  });

  const acknowledge = (action: Extract<WatchAction, { action: 'acknowledge' }>) => {
    const time = around.serverTime();
    let count = 0;
    for (const warning of warnings.values()) {
      if (warning.acknowledgedAt !== null || warning.id > (action.upTo ?? Number.POSITIVE_INFINITY)) continue;
      warning.acknowledgedAt = time;
      warning.acknowledgedBy = action.by;
      around.journal.change(warning);
      count++;
    }
    log('acknowledged', `${count} warning${count === 1 ? '' : 's'} acknowledged`, null, action.by);
    apply({ kind: 'acknowledge', ...(action.upTo === undefined ? {} : { upTo: action.upTo }) });
  };

  /** the watched channels and those that conditions read */
  const reads = () => [...new Set([...wanted, ...gate.wants()])];

  const pushAll = (frames: Frame[]) => {
    for (const frame of frames) {
      memo.gradeSince ??= frame.t0;
      happenings.length = 0;
      const steps = watch.push(frame, happenings);
      noteSteps(steps);
      for (const happening of happenings) tell(happening);
      graded = false;
    }
    dirty = true;
  };
  const readLeftOut = () => {
    const { marks, conditions } = around.leftOut(wanted);
    gate.setMarks(marks);
    pushAll(gate.setConditions(conditions, (channel) => around.channels.newestSample(channel)));
  };
  const leftOutNow = () => {
    const newest = around.channels.newest(memo.channels[0]!);
    return newest === null ? null : gate.why(newest, newest);
  };
  const silentNow = () => {
    const channel = gate.waitsFor();
    return channel !== null && around.silent(channel) ? channel : null;
  };
  readLeftOut();
  dirty = false;

  return {
    memo,
    wants: (channel) => memo.use !== 'taken out of use' && reads().includes(channel),
    push(frame) {
      pushAll(gate.take(frame));
    },
    leftOutChanged() {
      readLeftOut();
      around.touch(memo.watch);
    },
    tick() {
      if (shelfIsOver(memo.alarm, around.serverTime())) {
        log('unshelved', 'the shelf ended');
        apply({ kind: 'unshelve' });
      }
      const now = channelNow();
      if (memo.alarm.active && now !== null && now > spanEnd) over();
      if (!graded) updateGrade();
    },
    act(action) {
      switch (action.action) {
        case 'acknowledge':
          return acknowledge(action);
        case 'shelve':
          log('shelved', `shelved for ${action.seconds} s: ${action.reason}`, null, action.by);
          return apply({
            kind: 'shelve',
            until: around.serverTime() + action.seconds,
            reason: action.reason,
          });
        case 'unshelve':
          log('unshelved', 'taken off the shelf', null, action.by);
          return apply({ kind: 'unshelve' });
        case 'take out of service':
          log('out of service', `taken out of service: ${action.reason}`, null, action.by);
          return apply({ kind: 'take out of service', reason: action.reason });
        case 'return to service':
          log('in service', 'returned to service', null, action.by);
          return apply({ kind: 'return to service' });
      }
    },
    setUse(use, why) {
      if (use === memo.use) return;
      if (memo.use === 'taken out of use') {
        // What passed while it was out of use was never seen: it begins anew.
        watch = around.createWatch(settings);
        wanted = watch.wants();
        gate = createLeftOutGate(wanted);
        readLeftOut();
        tally = createTally();
        memo.gradeSince = null;
      }
      memo.use = use;
      log('watch', why === undefined ? use : `${use}: ${why}`);
      snapshotBytes = encoder.encode(checkpointNow());
      save();
      around.touch(memo.watch);
    },
    delivered(id) {
      for (const warning of warnings.values()) {
        if (warning.id !== id || warning.deliveredAt !== null) continue;
        warning.deliveredAt = around.serverTime();
        around.journal.change(warning);
      }
    },
    progress() {
      if (!dirty) return null;
      dirty = false;
      snapshotBytes = encoder.encode(checkpointNow());
      return { watch: memo.watch, snapshot: snapshotBytes, trace: trace.empty() };
    },
    checkpoint: checkpointNow,
    firstSnapshot: () => (snapshotBytes = encoder.encode(checkpointNow())),
    state() {
      if (grade === null && !graded) updateGrade();
      const { setAside } = memo.alarm;
      return {
        watch: memo.watch,
        name: memo.name,
        model: memo.model,
        channels: memo.channels,
        use: memo.use,
        state: alarmStateOf(memo.alarm),
        shelvedUntil: setAside?.kind === 'shelved' ? setAside.until : null,
        reason: setAside?.reason ?? null,
        trigger,
        window: model.delays * model.interval,
        delays: model.delays,
        rank: model.rank,
        interval: model.interval,
        rule,
        regime: model.regime,
        regimeChannel: settings.regimeChannel,
        switchWord: model.switchWord,
        sight: watch.sight(),
        leftOut: leftOutNow(),
        waitsFor: silentNow(),
        likeness: watch.likeness(),
        value,
        at,
        regimeNow: watch.regimeNow(),
        promise: model.score,
        grade,
        gradeSince: memo.gradeSince,
      };
    },
  };
}

const leftOutWords = (why: string | null): string | null => (why === null ? null : `left out (${why})`);

/** The channel the regime rule reads, where the model's channels are put on others. */
function placedChannel(model: Model, channels: string[]): string | null {
  const name = model.regime?.kind === 'marks' ? model.regime.channel : model.regimeChannel;
  if (name === null) return null;
  const place = model.channels.findIndex(({ channel }) => channel === name);
  return place === -1 ? name : channels[place]!;
}
