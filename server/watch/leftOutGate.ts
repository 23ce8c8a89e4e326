import {
  type ConditionState,
  createConditionState,
  type LeftOut,
  type LevelSide,
  leaveOut,
  noteCondition,
} from '../signal/leaveOut.ts';
import type { Frame } from './types.ts';

/** A stretch to leave out, and why in words. */
export interface GateMark extends LeftOut {
  why: string;
}

/** Leave a watch's samples out while the channel `when` lies beyond a level. */
export interface GateCondition extends LevelSide {
  when: string;
}

/** What a gate remembers of its conditions; plain data. Samples that wait are not in it. */
export type GateState = { condition: GateCondition; state: ConditionState }[];

/** The newest sample of a channel; null: it has none. */
export type NewestOf = (channel: string) => { time: number; value: number } | null;

/**
 * Stands before a watch: what is marked reaches it without values, and where another channel decides, samples wait
 * until that channel has one at or after their time. So neither the frames' sizes nor their order make a difference.
 * The price is a delay of up to one frame of the other channel, and that the watch waits while it is silent.
 */
export interface LeftOutGate {
  /** takes a frame of a watched channel or of a condition's; gives what may now be pushed into the watch */
  take(frame: Frame): Frame[];
  setMarks(marks: readonly GateMark[]): void;
  /**
   * Conditions that stay keep what is known of them, new ones begin with the newest sample of their channel. Gives the
   * samples that need not wait any longer.
   */
  setConditions(conditions: readonly GateCondition[], newest: NewestOf): Frame[];
  /** channels that the conditions read */
  wants(): string[];
  /** samples of a channel that wait */
  waiting(channel: string): number;
  /** the condition's channel that samples wait for; null: nothing waits */
  waitsFor(): string | null;
  /** why samples within [from, to] are left out, in words; null: they are not, as far as is known */
  why(from: number, to: number): string | null;
  state(): GateState;
}

interface Waiting {
  times: Float64Array;
  values: Float64Array;
}

/** Samples that may wait; beyond it the oldest go on without values. */
export const MOST_WAITING = 1_000_000;
/** Stretches kept of a condition although every channel has passed them, to tell why a gap was one. */
const PASSED_KEPT = 100;
/** Stretches remembered of a condition; beyond it the oldest two become one, with what is between them. */
const MOST_STRETCHES = 10_000;

/**
 * A gate before a watch of these channels.
 *
 * @param restored where its conditions stood; they are taken up again by `setConditions`
 */
export function createLeftOutGate(watched: readonly string[], restored: GateState = []): LeftOutGate {
  const queues = new Map(watched.map((channel) => [channel, [] as Waiting[]]));
  const released = new Map(watched.map((channel) => [channel, Number.NEGATIVE_INFINITY]));
  let known = restored;
  let conditions: GateState = [];
  let marks: readonly GateMark[] = [];

  const release = (): Frame[] => {
    const until = knownUntil(conditions);
    const stretches = [...marks, ...conditions.flatMap(({ state }) => stretchesOf(state))];
    const out: Frame[] = [];
    const put = (channel: string, times: Float64Array, values: Float64Array) => {
      out.push({ channel, t0: times[0]!, dt: 0, times, values });
      released.set(channel, times[times.length - 1]!);
    };
    for (const [channel, queue] of queues) {
      for (let part = takeUntil(queue, until); part !== null; part = takeUntil(queue, until))
        put(channel, part.times, leaveOut(part.times, part.values, stretches));
      while (waitingIn(queue) > MOST_WAITING) {
        const { times } = queue.shift()!;
        put(channel, times, new Float64Array(times.length).fill(Number.NaN));
      }
    }
    forget(conditions, Math.min(...released.values()));
    return out;
  };

  return {
    take(frame) {
      const { channel, times, t0, dt, values } = frame;
      const queue = queues.get(channel);
      if (conditions.length === 0 && marks.length === 0) return queue === undefined ? [] : [frame];
      const samples = { times: times ?? Float64Array.from(values, (_, i) => t0 + i * dt), values };
      for (const { condition, state } of conditions)
        if (condition.when === channel) noteCondition(state, condition, samples.times, values);
      if (values.length > 0) queue?.push(samples);
      return release();
    },
    setMarks(wanted) {
      marks = wanted;
    },
    setConditions(wanted, newest) {
      known = [...conditions, ...known];
      conditions = wanted.map((condition) => ({
        condition,
        state:
          known.find((one) => sameCondition(one.condition, condition))?.state ?? begun(condition, newest),
      }));
      known = [];
      return release();
    },
    wants: () => conditions.map(({ condition }) => condition.when),
    waiting: (channel) => waitingIn(queues.get(channel) ?? []),
    waitsFor() {
      if (![...queues.values()].some((queue) => queue.length > 0)) return null;
      const until = knownUntil(conditions);
      return conditions.find(({ state }) => state.newest === until)?.condition.when ?? null;
    },
    why(from, to) {
      const mark = marks.find((one) => one.from <= to && one.to >= from);
      if (mark !== undefined) return mark.why;
      const found = conditions.find(({ state }) =>
        stretchesOf(state).some((one) => one.from <= to && one.to >= from),
      );
      return found === undefined ? null : conditionWords(found.condition);
    },
    state: () => conditions.map(({ condition, state }) => ({ condition, state: copyOf(state) })),
  };
}

/** A condition in words: "bath above 30". */
export const conditionWords = ({ when, side, level }: GateCondition): string => `${when} ${side} ${level}`;

/** Time up to which every condition is known, seconds; ∞ where there is none. */
const knownUntil = (conditions: GateState): number =>
  Math.min(Number.POSITIVE_INFINITY, ...conditions.map(({ state }) => state.newest));

const stretchesOf = ({ over, since }: ConditionState): LeftOut[] =>
  since === null ? over : [...over, { from: since, to: Number.POSITIVE_INFINITY }];

const waitingIn = (queue: readonly Waiting[]): number =>
  queue.reduce((sum, { values }) => sum + values.length, 0);

const sameCondition = (a: GateCondition, b: GateCondition): boolean =>
  a.when === b.when && a.side === b.side && a.level === b.level;

const copyOf = (state: ConditionState): ConditionState => ({
  ...state,
  over: state.over.map((one) => ({ ...one })),
});

function begun(condition: GateCondition, newest: NewestOf): ConditionState {
  const state = createConditionState();
  const sample = newest(condition.when);
  if (sample === null) return state;
  noteCondition(state, condition, Float64Array.of(sample.time), Float64Array.of(sample.value));
  // what it was before its newest sample is not known here; that it was the same is the best guess
  state.over = [];
  if (state.since !== null) state.since = Number.NEGATIVE_INFINITY;
  return state;
}

/** The samples up to `until` of the oldest frame that waits; null when it begins later or none waits. */
function takeUntil(queue: Waiting[], until: number): Waiting | null {
  const oldest = queue[0];
  if (oldest === undefined || oldest.times[0]! > until) return null;
  const { times, values } = oldest;
  let count = times[times.length - 1]! <= until ? times.length : 1;
  while (count < times.length && times[count]! <= until) count++;
  if (count === times.length) queue.shift();
  else queue[0] = { times: times.subarray(count), values: values.subarray(count) };
  return { times: times.subarray(0, count), values: values.subarray(0, count) };
}

/** Drops stretches that every watched channel has passed. */
function forget(conditions: GateState, passed: number): void {
  for (const { state } of conditions) {
    while (state.over.length > PASSED_KEPT && state.over[0]!.to < passed) state.over.shift();
    while (state.over.length > MOST_STRETCHES) {
      const { from } = state.over.shift()!;
      state.over[0]!.from = from;
    }
  }
}
