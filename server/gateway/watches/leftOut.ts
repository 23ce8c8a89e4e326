import type { Condition, Mark, NewMark, StoredCondition } from '../../../shared-types/rehearsal.ts';
import type { Store } from '../../store/store.ts';
import { conditionWords, type GateCondition, type GateMark } from '../../watch/leftOutGate.ts';
import type { Channels } from '../channels/channels.ts';
import type { Journal } from '../journal.ts';
import { Refused } from '../refused.ts';

/** Marked stretches and conditions: what people said must not count. */
export interface LeftOutRegistry {
  marks(): Mark[];
  conditions(): StoredCondition[];
  /** counts the changes since the start */
  version(): number;
  /** for a watch of these channels: what is marked on any of them is left out on all of them */
  of(channels: readonly string[]): { marks: GateMark[]; conditions: GateCondition[] };
  addMark(mark: NewMark): Promise<Mark>;
  /** ends an open mark at `to` (seconds, channel time), or at the channel's newest sample */
  endMark(id: number, to: number | null, by: string): Promise<Mark>;
  removeMark(id: number): Promise<void>;
  addCondition(condition: Condition): Promise<StoredCondition>;
  removeCondition(id: number): Promise<void>;
  /** the condition that says the same */
  removeSameCondition(condition: Condition): Promise<void>;
}

export interface LeftOutNeeds {
  store: Store;
  channels: Channels;
  journal: Journal;
  /** told after every change */
  changed(): void;
}

/** Why a stretch is left out, as people read it: the text of "other", else the reason itself. */
export const whyMarked = ({ why, text }: Pick<Mark, 'why' | 'text'>): string =>
  why === 'other' && text !== '' ? text : why;

/** Reads what is stored and keeps it; what is changed is on disk before anybody is told. */
export async function createLeftOut({
  store,
  channels,
  journal,
  changed: told,
}: LeftOutNeeds): Promise<LeftOutRegistry> {
  const marks = new Map((await store.marks()).map((mark) => [mark.id, mark]));
  const conditions = new Map((await store.conditions()).map((condition) => [condition.id, condition]));

  let version = 0;
  const changed = () => {
    version++;
    told();
  };
  const log = (channel: string, text: string, by = '') =>
    journal.log({ kind: 'mark', channel, watch: null, by: by === '' ? null : by, text });
  const know = (channel: string) => {
    if (channels.has(channel)) return;
    throw new Refused(
      404,
      'NO_SUCH_CHANNEL',
      `there is no channel "${channel}"; GET /api/channels lists them`,
    );
  };
  const get = <T>(all: Map<number, T>, id: number, what: string): T => {
    const found = all.get(id);
    if (found !== undefined) return found;
    throw new Refused(404, 'NOT_THERE', `there is no ${what} ${id}; GET /api/${what}s lists them`);
  };
  const checkOrder = (from: number, to: number | null) => {
    if (to === null || to >= from) return;
    throw new Refused(400, 'BAD_RANGE', `the mark ends (${to}) before it begins (${from}); swap them`);
  };

  const sameAs = (wanted: Condition) =>
    [...conditions.values()].find(
      ({ channel, when, side, level }) =>
        channel === wanted.channel && when === wanted.when && side === wanted.side && level === wanted.level,
    );
  const removeCondition = async (id: number) => {
    const condition = get(conditions, id, 'condition');
    await store.removeCondition(id);
    conditions.delete(id);
    log(condition.channel, `no longer left out while ${conditionWords(condition)}`);
    changed();
  };

  return {
    marks: () => [...marks.values()],
    conditions: () => [...conditions.values()],
    version: () => version,
    of: (wanted) => ({
      marks: [...marks.values()]
        .filter(({ channel }) => wanted.includes(channel))
        .map((mark) => ({ from: mark.from, to: mark.to ?? Number.POSITIVE_INFINITY, why: whyMarked(mark) })),
      conditions: [...conditions.values()]
        .filter(({ channel }) => wanted.includes(channel))
        .map(({ when, side, level }) => ({ when, side, level })),
    }),
    async addMark(wanted) {
      know(wanted.channel);
      checkOrder(wanted.from, wanted.to);
      const id = await store.saveMark({ ...wanted, id: 0 });
      const mark = { ...wanted, id };
      marks.set(id, mark);
      log(mark.channel, `left out ${rangeWords(mark)}: ${whyWords(mark)}`, mark.by);
      changed();
      return mark;
    },
    async endMark(id, to, by) {
      const mark = get(marks, id, 'mark');
      if (mark.to !== null)
        throw new Refused(
          409,
          'HAS_ENDED',
          `mark ${id} ended at ${mark.to} already; remove it and make another`,
        );
      const ended = { ...mark, to: to ?? Math.max(mark.from, channels.newest(mark.channel) ?? mark.from) };
      checkOrder(ended.from, ended.to);
      await store.saveMark(ended);
      marks.set(id, ended);
      log(mark.channel, `counts again after ${secondsText(ended.to)} (${whyWords(mark)})`, by);
      changed();
      return ended;
    },
    async removeMark(id) {
      const mark = get(marks, id, 'mark');
      await store.removeMark(id);
      marks.delete(id);
      log(mark.channel, `no longer left out ${rangeWords(mark)}: ${whyWords(mark)}`);
      changed();
    },
    async addCondition(wanted) {
      know(wanted.channel);
      know(wanted.when);
      const known = sameAs(wanted);
      if (known !== undefined) return known;
      const id = await store.saveCondition({ ...wanted, id: 0 });
      const condition = { ...wanted, id };
      conditions.set(id, condition);
      log(wanted.channel, `left out while ${conditionWords(wanted)}`);
      changed();
      return condition;
    },
    removeCondition,
    async removeSameCondition(wanted) {
      const known = sameAs(wanted);
      if (known !== undefined) return removeCondition(known.id);
      throw new Refused(
        404,
        'NOT_THERE',
        `nothing is left out while ${conditionWords(wanted)}; GET /api/conditions lists what is`,
      );
    },
  };
}

const rangeWords = ({ from, to }: Mark): string =>
  to === null ? `from ${secondsText(from)} on` : `from ${secondsText(from)} to ${secondsText(to)}`;

const whyWords = ({ why, text }: Mark): string => (text === '' ? why : `${why}, ${text}`);

/** Below this a channel has elapsed time, not the time of a clock. */
const CLOCK_TIME = 1e8;

const secondsText = (time: number): string =>
  time < CLOCK_TIME || time > 1e11 ? `${time} s` : new Date(time * 1000).toISOString();
