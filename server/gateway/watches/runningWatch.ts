import { Decoder, Encoder } from 'cbor-x';
import type { Model } from '../../../shared-types/model.ts';
import type { ActedOn, LogEntry, SwitchEvent, Warning } from '../../../shared-types/warning.ts';
import type { WatchAction, WatchState } from '../../../shared-types/watch.ts';
import type { StoredWatch, WatchProgress } from '../../store/store.ts';
import {
  createLeftOutGate,
  type GateCondition,
  type GateMark,
  type GateState,
} from '../../watch/leftOutGate.ts';
import type { Frame, Happening, Steps, Watch, WatchSettings, WatchSnapshot } from '../../watch/types.ts';
import type { Channels } from '../channels/channels.ts';
import type { Journal } from '../journal.ts';
import { type Alarm, type AlarmEvent, alarmAfter, alarmStateOf, shelfIsOver } from './alarmState.ts';
import { liveScore } from './liveScore.ts';
import { createTraceBuffer } from './traceBuffer.ts';
import { createWatchBook } from './watchBook.ts';

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
  /** server clock, Unix seconds, at which it was started; absent in what older versions stored */
  beganAt?: number;
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
  /** says that a warning was acted on, or takes it back; null: there is no such warning */
  actOn(warning: number, said: ActedOn): Warning | null;
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

type LogKind = LogEntry['kind'];

/** Times from here on are Unix time, below it elapsed time. */
const UNIX_FROM = 1e8;

const encoder = new Encoder({ useRecords: false });
const decoder = new Decoder({ mapsAsObjects: true, useRecords: false });

export const readCheckpoint = (bytes: Uint8Array): Checkpoint => decoder.decode(bytes) as Checkpoint;

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
  const book = createWatchBook(known, rule && { ...rule, interval: model.interval }, memo.beganAt ?? null);
  let snapshotBytes: Uint8Array | null = null;
  let dirty = false;
  let value: number | null = null;
  let at: number | null = null;
  let grade: WatchState['grade'] = null;
  let gradeAtDelivery: WatchState['gradeAtDelivery'] = null;
  let graded = false;

  const save = () =>
    around.save({ watch: memo.watch, settings: JSON.stringify(memo), snapshot: snapshotBytes });
  /** false: nothing changed */
  const apply = (event: AlarmEvent): boolean => {
    const before = memo.alarm;
    memo.alarm = alarmAfter(before, event);
    if (memo.alarm === before) return false;
    save();
    around.touch(memo.watch);
    return true;
  };
  const log = (kind: LogKind, text: string, channel: string | null = null, by: string | null = null) =>
    around.journal.log({ kind, channel, watch: memo.watch, by, text });

  const channelNow = () => around.channels.time(memo.channels[0]!, around.serverTime());

  const warn = (happening: Extract<Happening, { kind: 'warning' }>) => {
    if (!rule || book.warningAt(happening.at) !== undefined) return;
    const now = Math.max(
      channelNow() ?? happening.at,
      around.channels.newest(memo.channels[0]!) ?? happening.at,
    );
    const [from, to] = [happening.at + rule.leastLead, happening.at + rule.horizon];
    // without a least lead a span begins with its warning: then it is too late only once it is over
    const tooLate = now > (rule.leastLead > 0 ? from : to);
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
      quiet: tooLate,
      called: !tooLate && memo.use === 'in use' && !trigger && memo.alarm.setAside === null,
    };
    book.issue(warning);
    around.journal.issue(warning);
    if (now <= to && memo.use === 'in use') apply({ kind: 'warning', id: warning.id, trigger });
  };

  const settle = (happening: Extract<Happening, { kind: 'graded' }>) => {
    const warning = book.settle(happening);
    if (warning === null) return;
    around.journal.change(warning);
    overUnlessOpen(happening.at);
  };

  const switched = (happening: Extract<Happening, { kind: 'switch' }>) => {
    const { kind: _, warningAt, ...told } = happening;
    const event: SwitchEvent = {
      ...told,
      id: 0,
      watch: memo.watch,
      channel: settings.regimeChannel ?? memo.channels[0]!,
      loggedAt: around.serverTime(),
      warning: warningAt === null ? null : (book.warningAt(warningAt)?.id ?? null),
    };
    if (book.meet(event)) around.journal.noteSwitch(event);
  };

  /** The condition is over when no warning is open any more, or all spans have passed by `now` (channel time). */
  const overUnlessOpen = (now: number) => {
    if (memo.alarm.active && !(now <= book.openUntil())) apply({ kind: 'over' });
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
    overUnlessOpen(at);
  };

  const updateGrade = () => {
    graded = true;
    if (rule === null || model.regime === null) return;
    const { leastLead, horizon } = rule;
    const [seconds, covered] = [watch.watchedSeconds(), watch.coveredSeconds()];
    const watched = { seconds, covered, interval: model.interval, leastLead, horizon };
    grade = liveScore(book.tally, watched);
    gradeAtDelivery = liveScore(book.heard, watched);
  };

  const checkpointNow = (): Checkpoint => ({
    snapshot: watch.snapshot(),
    ordinals: Object.fromEntries(
      reads().map((name) => [name, around.channels.samples(name) - gate.waiting(name)]),
    ),
    offsets: Object.fromEntries(reads().map((name) => [name, around.channels.leastOffset(name)])),
    gate: gate.state(),
  });

  const acknowledge = ({
    upTo = Number.POSITIVE_INFINITY,
    by,
  }: {
    upTo?: number | undefined;
    by: string;
  }) => {
    const covered = book.acknowledge(upTo, around.serverTime(), by);
    for (const warning of covered) around.journal.change(warning);
    if (covered.length > 0)
      log(
        'acknowledged',
        `${covered.length} warning${covered.length === 1 ? '' : 's'} acknowledged`,
        null,
        by,
      );
    apply({ kind: 'acknowledge', upTo });
  };

  /** Applies what a person asked for and logs it, once: a second click changes nothing and is not logged. */
  const obey = (event: AlarmEvent, kind: LogKind, text: string, by: string) => {
    if (apply(event)) log(kind, text, null, by);
  };

  /** channel time from which somebody could hear its warnings; what came before was recorded before it began */
  const heardSince = () =>
    memo.gradeSince === null || memo.beganAt === undefined || memo.gradeSince < UNIX_FROM
      ? memo.gradeSince
      : Math.max(memo.gradeSince, memo.beganAt);

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
      if (now !== null) overUnlessOpen(now);
      if (!graded) updateGrade();
    },
    act(action) {
      const { by } = action;
      switch (action.action) {
        case 'acknowledge':
          return acknowledge(action);
        case 'reset':
          return obey({ kind: 'reset' }, 'latch', 'reset', by);
        case 'latch': {
          const text = action.on ? 'latches from now on: stays until it is reset' : 'latches no longer';
          return obey({ kind: 'latch', on: action.on }, 'latch', text, by);
        }
        case 'shelve': {
          const { seconds, reason } = action;
          const until = around.serverTime() + seconds;
          return obey(
            { kind: 'shelve', until, reason, by },
            'shelved',
            `shelved for ${seconds} s: ${reason}`,
            by,
          );
        }
        case 'unshelve':
          return obey({ kind: 'unshelve' }, 'unshelved', 'taken off the shelf', by);
        case 'take out of service': {
          const { reason } = action;
          const text = `taken out of service: ${reason}`;
          return obey({ kind: 'take out of service', reason, by }, 'out of service', text, by);
        }
        case 'return to service':
          return obey({ kind: 'return to service' }, 'in service', 'returned to service', by);
      }
    },
    actOn(id, said) {
      const known = book.warning(id);
      if (known === undefined) return null;
      const warning = book.act(id, said, around.serverTime());
      if (warning === null) return known;
      const what = said.text === '' ? '' : `: ${said.text}`;
      log(
        'acted',
        said.acted ? `warning ${id} was acted on${what}` : `warning ${id} was not acted on after all`,
        warning.channels[0]!,
        said.by,
      );
      graded = false;
      // whoever acted on it has seen it
      if (said.acted && warning.acknowledgedAt === null) acknowledge({ upTo: id, by: said.by });
      around.journal.change(warning);
      overUnlessOpen(warning.at);
      around.touch(memo.watch);
      return warning;
    },
    setUse(use, why) {
      if (use === memo.use) return;
      if (memo.use === 'taken out of use') {
        // What passed while it was out of use was never seen: it begins anew.
        watch = around.createWatch(settings);
        wanted = watch.wants();
        gate = createLeftOutGate(wanted);
        readLeftOut();
        book.beginAnew();
        memo.gradeSince = null;
      }
      memo.use = use;
      log('watch', why === undefined ? use : `${use}: ${why}`);
      snapshotBytes = encoder.encode(checkpointNow());
      save();
      around.touch(memo.watch);
    },
    delivered(id) {
      const warning = book.warning(id);
      if (warning === undefined || warning.deliveredAt !== null) return;
      warning.deliveredAt = around.serverTime();
      around.journal.change(warning);
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
        setAsideBy: setAside?.by || null,
        latching: memo.alarm.latching ?? false,
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
        verdict: model.verdict ? [model.verdict.kind, model.verdict.than].filter(Boolean).join(' ') : null,
        promise: model.score,
        grade,
        gradeAtDelivery,
        gradeSince: memo.gradeSince,
        heardSince: heardSince(),
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
