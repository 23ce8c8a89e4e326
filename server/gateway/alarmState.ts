import type { AlarmState } from '../../shared-types/watch.ts';

/** The states an alarm moves through by itself; A, B, C and D of the standards' state diagrams. */
export type ProcessState =
  | 'normal'
  | 'unacknowledged'
  | 'acknowledged'
  | 'returned to normal, unacknowledged';

/** Set aside by a person. Times are the server clock, Unix seconds. */
export type SetAside =
  | { kind: 'shelved'; until: number; reason: string }
  | { kind: 'out of service'; reason: string };

/** What a watch's alarm remembers. Plain data, stored with the watch. */
export interface Alarm {
  process: ProcessState;
  setAside: SetAside | null;
  /** a warning's span is running and its switch has not come */
  active: boolean;
  /** id of the newest warning; 0: none yet */
  newestWarning: number;
}

export type AlarmEvent =
  /** `trigger`: nobody is to be asked */
  | { kind: 'warning'; id: number; trigger: boolean }
  /** the span is over, or the switch came */
  | { kind: 'over' }
  /** covers the warnings up to `upTo`; all so far when absent */
  | { kind: 'acknowledge'; upTo?: number }
  | { kind: 'shelve'; until: number; reason: string }
  | { kind: 'unshelve' }
  | { kind: 'take out of service'; reason: string }
  | { kind: 'return to service' };

export const NO_ALARM: Alarm = { process: 'normal', setAside: null, active: false, newestWarning: 0 };

const ON_OVER: Record<ProcessState, ProcessState> = {
  normal: 'normal',
  unacknowledged: 'returned to normal, unacknowledged',
  acknowledged: 'normal',
  'returned to normal, unacknowledged': 'returned to normal, unacknowledged',
};

const ON_ACKNOWLEDGE: Record<ProcessState, ProcessState> = {
  normal: 'normal',
  unacknowledged: 'acknowledged',
  acknowledged: 'acknowledged',
  'returned to normal, unacknowledged': 'normal',
};

/** The state as the standards name it. */
export function alarmStateOf(alarm: Alarm): AlarmState {
  return alarm.setAside?.kind ?? alarm.process;
}

/**
 * A watch's alarm after an event: normal -> unacknowledged on a warning, -> acknowledged by a person, -> normal when
 * the condition is over; over before it was acknowledged -> returned to normal, unacknowledged -> normal by a person;
 * a further warning makes any of them unacknowledged. Shelved and out of service hide these states: warnings
 * meanwhile ask nobody, and back in service only a condition still present does. A trigger never asks.
 *
 * @see ANSI/ISA-18.2-2016, IEC 62682:2014: the alarm state transition diagram, as public summaries give it
 */
export function alarmAfter(alarm: Alarm, event: AlarmEvent): Alarm {
  switch (event.kind) {
    case 'warning': {
      const asks = !event.trigger && alarm.setAside === null;
      return {
        ...alarm,
        active: !event.trigger,
        newestWarning: event.id,
        process: asks ? 'unacknowledged' : alarm.process,
      };
    }
    case 'over':
      return { ...alarm, active: false, process: ON_OVER[alarm.process] };
    case 'acknowledge':
      // A warning issued while the person was still looking at an earlier one is not covered by the click.
      if (event.upTo !== undefined && event.upTo < alarm.newestWarning) return alarm;
      return { ...alarm, process: ON_ACKNOWLEDGE[alarm.process] };
    case 'shelve':
      if (alarm.setAside?.kind === 'out of service') return alarm;
      return {
        ...alarm,
        process: 'normal',
        setAside: { kind: 'shelved', until: event.until, reason: event.reason },
      };
    case 'take out of service':
      return { ...alarm, process: 'normal', setAside: { kind: 'out of service', reason: event.reason } };
    case 'unshelve':
      return alarm.setAside?.kind === 'shelved' ? backInService(alarm) : alarm;
    case 'return to service':
      return alarm.setAside?.kind === 'out of service' ? backInService(alarm) : alarm;
  }
}

function backInService(alarm: Alarm): Alarm {
  return { ...alarm, setAside: null, process: alarm.active ? 'unacknowledged' : 'normal' };
}

/** Whether the shelf has ended by the server clock (Unix seconds). */
export function shelfIsOver(alarm: Alarm, serverTime: number): boolean {
  return alarm.setAside?.kind === 'shelved' && serverTime >= alarm.setAside.until;
}
