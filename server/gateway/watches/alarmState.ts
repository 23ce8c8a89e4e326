import type { AlarmState } from '../../../shared-types/watch.ts';

/**
 * The states an alarm moves through by itself and by acknowledgement: A to F of the standards' state diagram. Only a
 * latching alarm comes to the latched ones: it stays until a person resets it.
 */
export type ProcessState =
  | 'normal'
  | 'unacknowledged'
  | 'acknowledged'
  | 'returned to normal, unacknowledged'
  | 'latched, unacknowledged'
  | 'latched, acknowledged';

/** Set aside by a person. Times are the server clock, Unix seconds; `by`: '' or absent when nobody said who. */
export type SetAside =
  | { kind: 'shelved'; until: number; reason: string; by?: string }
  | { kind: 'out of service'; reason: string; by?: string };

/** What a watch's alarm remembers. Plain data, stored with the watch. */
export interface Alarm {
  process: ProcessState;
  setAside: SetAside | null;
  /** a warning's span is running and its switch has not come */
  active: boolean;
  /** id of the newest warning; 0: none yet */
  newestWarning: number;
  /** it latches; absent in what older versions stored: it does not */
  latching?: boolean;
}

export type AlarmEvent =
  /** `trigger`: nobody is to be asked */
  | { kind: 'warning'; id: number; trigger: boolean }
  /** no warning is open any more: the spans are over or their switches came */
  | { kind: 'over' }
  /** covers the warnings up to `upTo`; all so far when absent */
  | { kind: 'acknowledge'; upTo?: number }
  /** lets a latched alarm go that was acknowledged */
  | { kind: 'reset' }
  | { kind: 'latch'; on: boolean }
  | { kind: 'shelve'; until: number; reason: string; by?: string }
  | { kind: 'unshelve' }
  | { kind: 'take out of service'; reason: string; by?: string }
  | { kind: 'return to service' };

export const NO_ALARM: Alarm = { process: 'normal', setAside: null, active: false, newestWarning: 0 };

/** What moves an alarm from one process state to another. */
type Signal = 'warning' | 'over' | 'over, latching' | 'acknowledge' | 'reset' | 'no longer latching';

/**
 * The state diagram as a table: from each state, by each signal.
 *
 * @see ANSI/ISA-18.2-2016, IEC 62682:2014: the alarm state transition diagram, as public summaries give it
 */
const NEXT: Readonly<Record<ProcessState, Readonly<Record<Signal, ProcessState>>>> = {
  normal: {
    warning: 'unacknowledged',
    over: 'normal',
    'over, latching': 'normal',
    acknowledge: 'normal',
    reset: 'normal',
    'no longer latching': 'normal',
  },
  unacknowledged: {
    warning: 'unacknowledged',
    over: 'returned to normal, unacknowledged',
    'over, latching': 'latched, unacknowledged',
    acknowledge: 'acknowledged',
    reset: 'unacknowledged',
    'no longer latching': 'unacknowledged',
  },
  acknowledged: {
    warning: 'unacknowledged',
    over: 'normal',
    'over, latching': 'latched, acknowledged',
    acknowledge: 'acknowledged',
    reset: 'acknowledged',
    'no longer latching': 'acknowledged',
  },
  'returned to normal, unacknowledged': {
    warning: 'unacknowledged',
    over: 'returned to normal, unacknowledged',
    'over, latching': 'returned to normal, unacknowledged',
    acknowledge: 'normal',
    reset: 'returned to normal, unacknowledged',
    'no longer latching': 'returned to normal, unacknowledged',
  },
  'latched, unacknowledged': {
    warning: 'unacknowledged',
    over: 'latched, unacknowledged',
    'over, latching': 'latched, unacknowledged',
    acknowledge: 'latched, acknowledged',
    reset: 'latched, unacknowledged',
    'no longer latching': 'returned to normal, unacknowledged',
  },
  'latched, acknowledged': {
    warning: 'unacknowledged',
    over: 'latched, acknowledged',
    'over, latching': 'latched, acknowledged',
    acknowledge: 'latched, acknowledged',
    reset: 'normal',
    'no longer latching': 'normal',
  },
};

/** The state as the standards name it. */
export function alarmStateOf(alarm: Alarm): AlarmState {
  return alarm.setAside?.kind ?? alarm.process;
}

/**
 * A watch's alarm after an event, the same object where nothing changed. Shelved and out of service hide the process
 * states: warnings meanwhile ask nobody, and back in service only a condition still present does. A trigger never asks.
 */
export function alarmAfter(alarm: Alarm, event: AlarmEvent): Alarm {
  const moved = (signal: Signal, changes: Partial<Alarm> = {}): Alarm => {
    const after = { ...alarm, process: NEXT[alarm.process][signal], ...changes };
    return isSame(alarm, after) ? alarm : after;
  };
  switch (event.kind) {
    case 'warning': {
      const asks = !event.trigger && alarm.setAside === null;
      const news = { active: !event.trigger, newestWarning: event.id };
      return asks ? moved('warning', news) : { ...alarm, ...news };
    }
    case 'over':
      return moved(alarm.latching ? 'over, latching' : 'over', { active: false });
    case 'acknowledge':
      // A warning issued while the person was still looking at an earlier one is not covered by the click.
      return event.upTo !== undefined && event.upTo < alarm.newestWarning ? alarm : moved('acknowledge');
    case 'reset':
      return moved('reset');
    case 'latch':
      if ((alarm.latching ?? false) === event.on) return alarm;
      return event.on ? { ...alarm, latching: true } : moved('no longer latching', { latching: false });
    case 'shelve':
    case 'take out of service':
      return setAside(alarm, event);
    case 'unshelve':
      return alarm.setAside?.kind === 'shelved' ? backInService(alarm) : alarm;
    case 'return to service':
      return alarm.setAside?.kind === 'out of service' ? backInService(alarm) : alarm;
  }
}

function isSame(one: Alarm, other: Alarm): boolean {
  return (
    one.process === other.process &&
    one.active === other.active &&
    one.newestWarning === other.newestWarning &&
    one.latching === other.latching
  );
}

function setAside(
  alarm: Alarm,
  event: Extract<AlarmEvent, { kind: 'shelve' | 'take out of service' }>,
): Alarm {
  const { reason, by = '' } = event;
  if (event.kind === 'take out of service')
    return { ...alarm, process: 'normal', setAside: { kind: 'out of service', reason, by } };
  // what is out of service stays so until it is returned
  if (alarm.setAside?.kind === 'out of service') return alarm;
  return { ...alarm, process: 'normal', setAside: { kind: 'shelved', until: event.until, reason, by } };
}

function backInService(alarm: Alarm): Alarm {
  return { ...alarm, setAside: null, process: alarm.active ? 'unacknowledged' : 'normal' };
}

/** Whether the shelf has ended by the server clock (Unix seconds). */
export function shelfIsOver(alarm: Alarm, serverTime: number): boolean {
  return alarm.setAside?.kind === 'shelved' && serverTime >= alarm.setAside.until;
}
