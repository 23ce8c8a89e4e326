import { describe, expect, it } from 'vitest';
import {
  type Alarm,
  type AlarmEvent,
  alarmAfter,
  alarmStateOf,
  NO_ALARM,
  type ProcessState,
  shelfIsOver,
} from '../../../server/gateway/alarmState.ts';

const B: Alarm = { ...NO_ALARM, process: 'unacknowledged', active: true, newestWarning: 1 };
const C: Alarm = { ...B, process: 'acknowledged' };
const D: Alarm = { ...B, process: 'returned to normal, unacknowledged', active: false };
const warning: AlarmEvent = { kind: 'warning', id: 2, trigger: false };
const over: AlarmEvent = { kind: 'over' };
const acknowledge: AlarmEvent = { kind: 'acknowledge' };

describe('the alarm state diagram of ISA-18.2 and IEC 62682 (states A to D, as public summaries agree)', () => {
  const table: [string, Alarm, AlarmEvent, ProcessState][] = [
    ['A to B when the condition appears', NO_ALARM, warning, 'unacknowledged'],
    ['B to C when acknowledged', B, acknowledge, 'acknowledged'],
    ['C to A when the condition is over', C, over, 'normal'],
    ['B to D when the condition is over', B, over, 'returned to normal, unacknowledged'],
    ['D to A when acknowledged', D, acknowledge, 'normal'],
    ['D to B when the condition appears again', D, warning, 'unacknowledged'],
    ['C to B on a further warning', C, warning, 'unacknowledged'],
    ['B stays B on a further warning', B, warning, 'unacknowledged'],
    ['A stays A when acknowledged', NO_ALARM, acknowledge, 'normal'],
    ['A stays A when a condition is over', NO_ALARM, over, 'normal'],
    ['C stays C when acknowledged again', C, acknowledge, 'acknowledged'],
    ['D stays D when the condition is over', D, over, 'returned to normal, unacknowledged'],
  ];
  it.each(table)('goes from %s', (_title, from, event, to) => {
    expect(alarmStateOf(alarmAfter(from, event))).toBe(to);
  });
});

describe('what a person sets aside', () => {
  const shelve: AlarmEvent = { kind: 'shelve', until: 100, reason: 'calibrating' };
  const outOfService: AlarmEvent = { kind: 'take out of service', reason: 'no sensor' };

  it.each([NO_ALARM, B, C, D])('is shelved from any state, with its reason', (from) => {
    const shelved = alarmAfter(from, shelve);
    expect(alarmStateOf(shelved)).toBe('shelved');
    expect(shelved.setAside?.reason).toBe('calibrating');
  });

  it('asks nobody while shelved or out of service', () => {
    for (const event of [shelve, outOfService]) {
      const aside = alarmAfter(NO_ALARM, event);
      expect(alarmStateOf(alarmAfter(aside, warning))).toBe(alarmStateOf(aside));
    }
  });

  it('asks again afterwards only if the condition is still there', () => {
    const shelved = alarmAfter(NO_ALARM, shelve);
    expect(alarmStateOf(alarmAfter(shelved, { kind: 'unshelve' }))).toBe('normal');
    const warned = alarmAfter(shelved, warning);
    expect(alarmStateOf(alarmAfter(warned, { kind: 'unshelve' }))).toBe('unacknowledged');
    const past = alarmAfter(warned, over);
    expect(alarmStateOf(alarmAfter(past, { kind: 'unshelve' }))).toBe('normal');
  });

  it('is out of service until it is returned, whatever shelves do', () => {
    const out = alarmAfter(B, outOfService);
    expect(alarmStateOf(alarmAfter(out, shelve))).toBe('out of service');
    expect(alarmStateOf(alarmAfter(out, { kind: 'unshelve' }))).toBe('out of service');
    expect(alarmStateOf(alarmAfter(out, { kind: 'return to service' }))).toBe('unacknowledged');
    expect(alarmAfter(B, { kind: 'return to service' })).toBe(B);
    expect(alarmAfter(B, { kind: 'unshelve' })).toBe(B);
  });

  it('knows when the shelf ends', () => {
    const shelved = alarmAfter(NO_ALARM, shelve);
    expect(shelfIsOver(shelved, 99)).toBe(false);
    expect(shelfIsOver(shelved, 100)).toBe(true);
    expect(shelfIsOver(B, 100)).toBe(false);
  });
});

describe('an acknowledgement', () => {
  it('does not cover a warning issued after the one it names', () => {
    const two = alarmAfter(B, warning);
    expect(alarmStateOf(alarmAfter(two, { kind: 'acknowledge', upTo: 1 }))).toBe('unacknowledged');
    expect(alarmStateOf(alarmAfter(two, { kind: 'acknowledge', upTo: 2 }))).toBe('acknowledged');
  });
});

describe('a trigger', () => {
  it('never asks anybody', () => {
    const after = alarmAfter(NO_ALARM, { kind: 'warning', id: 7, trigger: true });
    expect(alarmStateOf(after)).toBe('normal');
    expect(alarmStateOf(alarmAfter(after, over))).toBe('normal');
    const shelved = alarmAfter(after, { kind: 'shelve', until: 1, reason: 'x' });
    expect(alarmStateOf(alarmAfter(shelved, { kind: 'unshelve' }))).toBe('normal');
  });
});
