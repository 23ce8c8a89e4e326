import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import {
  type Alarm,
  type AlarmEvent,
  alarmAfter,
  alarmStateOf,
  NO_ALARM,
  type ProcessState,
  shelfIsOver,
} from '../../../../server/gateway/watches/alarmState.ts';

const B: Alarm = { ...NO_ALARM, process: 'unacknowledged', active: true, newestWarning: 1 };
const C: Alarm = { ...B, process: 'acknowledged' };
const D: Alarm = { ...B, process: 'returned to normal, unacknowledged', active: false };
const warning: AlarmEvent = { kind: 'warning', id: 2, trigger: false };
const over: AlarmEvent = { kind: 'over' };
const acknowledge: AlarmEvent = { kind: 'acknowledge' };

/** The states by their letters in the standards' diagram. */
const LETTERS: Record<string, ProcessState> = {
  A: 'normal',
  B: 'unacknowledged',
  C: 'acknowledged',
  D: 'returned to normal, unacknowledged',
  E: 'latched, unacknowledged',
  F: 'latched, acknowledged',
};
const inState = (letter: string, latching: boolean): Alarm => ({
  process: LETTERS[letter]!,
  setAside: null,
  active: letter === 'B' || letter === 'C',
  newestWarning: 1,
  latching,
});

/**
 * Every state by every event, as ANSI/ISA-18.2-2016 and IEC 62682:2014 draw it (the transitions A to B, B to C, C to A,
 * B to D, D to A, D to B, C to B and that a latched alarm needs a reset as several public summaries agree; the letters E
 * and F from memory; the standards themselves were not read).
 */
const DIAGRAM: Record<string, [latching: boolean, event: AlarmEvent, row: Record<string, string>]> = {
  'a warning': [false, warning, { A: 'B', B: 'B', C: 'B', D: 'B', E: 'B', F: 'B' }],
  'return to normal': [false, over, { A: 'A', B: 'D', C: 'A', D: 'D', E: 'E', F: 'F' }],
  'return to normal, latching': [true, over, { A: 'A', B: 'E', C: 'F', D: 'D', E: 'E', F: 'F' }],
  acknowledging: [false, acknowledge, { A: 'A', B: 'C', C: 'C', D: 'A', E: 'F', F: 'F' }],
  'a reset': [true, { kind: 'reset' }, { A: 'A', B: 'B', C: 'C', D: 'D', E: 'E', F: 'A' }],
  'no longer latching': [
    true,
    { kind: 'latch', on: false },
    { A: 'A', B: 'B', C: 'C', D: 'D', E: 'D', F: 'A' },
  ],
};

describe('the alarm state diagram of ISA-18.2 and IEC 62682', () => {
  for (const [name, [latching, event, row]] of Object.entries(DIAGRAM))
    it.each(Object.entries(row))(`goes by ${name} from %s to %s`, (from, to) => {
      expect(alarmStateOf(alarmAfter(inState(from, latching), event))).toBe(LETTERS[to]);
    });

  it('is the same object where nothing changed, so that a second click does nothing', () => {
    for (const [name, [latching, event]] of Object.entries(DIAGRAM)) {
      if (name === 'a warning') continue;
      for (const letter of Object.keys(LETTERS)) {
        const once = alarmAfter(inState(letter, latching), event);
        expect(alarmAfter(once, event), `${name} twice from ${letter}`).toBe(once);
      }
    }
  });
});

describe('any sequence of events', () => {
  const anyEvent: fc.Arbitrary<AlarmEvent> = fc.oneof(
    fc.constant<AlarmEvent>(warning),
    fc.constant<AlarmEvent>(over),
    fc.record({ kind: fc.constant('acknowledge' as const), upTo: fc.nat(40) }),
    fc.constant<AlarmEvent>(acknowledge),
    fc.constant<AlarmEvent>({ kind: 'reset' }),
    fc.record({ kind: fc.constant('latch' as const), on: fc.boolean() }),
    fc.constant<AlarmEvent>({ kind: 'shelve', until: 10, reason: 'r' }),
    fc.constant<AlarmEvent>({ kind: 'unshelve' }),
    fc.constant<AlarmEvent>({ kind: 'take out of service', reason: 'r' }),
    fc.constant<AlarmEvent>({ kind: 'return to service' }),
  );
  /** the sequence with warnings numbered as they come, of a trigger or of a watch that asks */
  const numbered = (events: AlarmEvent[], trigger: boolean) =>
    events.map((event, i) => (event.kind === 'warning' ? { ...event, id: i + 1, trigger } : event));

  it('keeps what must always hold', () => {
    fc.assert(
      fc.property(fc.array(anyEvent, { maxLength: 40 }), fc.boolean(), (events, trigger) => {
        let alarm = NO_ALARM;
        for (const event of numbered(events, trigger)) {
          const before = alarm;
          alarm = alarmAfter(before, event);
          const state = alarmStateOf(alarm);
          if (trigger) expect(['normal', 'shelved', 'out of service']).toContain(state);
          // what is set aside asks nobody
          if (alarm.setAside !== null) expect(['shelved', 'out of service']).toContain(state);
          // an acknowledgement of older warnings never covers a newer one
          if (event.kind === 'acknowledge' && event.upTo !== undefined && event.upTo < before.newestWarning)
            expect(alarm).toBe(before);
          // only a warning, or the end of what set it aside, asks a person
          const asks = state === 'unacknowledged' && alarmStateOf(before) !== 'unacknowledged';
          if (asks) expect(['warning', 'unshelve', 'return to service']).toContain(event.kind);
          // latched states exist only while the alarm latches
          if (state.startsWith('latched')) expect(alarm.latching).toBe(true);
          // acknowledged means that the condition is still there, returned that it is not
          if (state === 'acknowledged') expect(alarm.active).toBe(true);
          if (state === 'returned to normal, unacknowledged') expect(alarm.active).toBe(false);
        }
      }),
      { seed: 62682, numRuns: 2000 },
    );
  });

  it('gives the same state whether it is replayed whole or from any stored state on', () => {
    fc.assert(
      fc.property(fc.array(anyEvent, { maxLength: 30 }), fc.nat(30), (events, cut) => {
        const all = numbered(events, false);
        const run = (from: Alarm, some: AlarmEvent[]) => some.reduce(alarmAfter, from);
        const stored = JSON.parse(JSON.stringify(run(NO_ALARM, all.slice(0, cut)))) as Alarm;
        expect(run(stored, all.slice(cut))).toEqual(run(NO_ALARM, all));
      }),
      { seed: 18, numRuns: 500 },
    );
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
