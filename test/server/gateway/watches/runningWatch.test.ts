import { describe, expect, it } from 'vitest';
import { NO_ALARM } from '../../../../server/gateway/watches/alarmState.ts';
import { createRunningWatch, type Surroundings } from '../../../../server/gateway/watches/runningWatch.ts';
import type { Frame, Happening, Watch } from '../../../../server/watch/types.ts';
import type { LogEntry, Warning } from '../../../../shared-types/warning.ts';
import { swingModel } from '../harness.ts';

/** A watch that says what it is told to say, one step a frame. */
function scripted(leastLead = 10) {
  const model = swingModel();
  model.rule = { ...model.rule!, leastLead, horizon: 20 };
  let next: Happening[] = [];
  let now = 0;
  const watch: Watch = {
    push(frame, happenings) {
      happenings.push(...next);
      const at = Float64Array.of(frame.t0);
      return { count: 1, time: at, newest: at, value: Float64Array.of(1) };
    },
    sight: () => ({ kind: 'seeing' }),
    likeness: () => ({ kind: 'like' }),
    regimeNow: () => 0,
    watchedSeconds: () => 100,
    coveredSeconds: () => 20,
    wants: () => ['c'],
    snapshot: () => ({ version: 1 }),
  };
  const log: Omit<LogEntry, 'id' | 'time'>[] = [];
  const told: Warning[] = [];
  let ids = 0;
  const around = {
    channels: {
      time: () => now,
      newest: () => now,
      newestSample: () => null,
      samples: () => 0,
      leastOffset: () => null,
    },
    journal: {
      issue(warning: Warning) {
        warning.id = ++ids;
        told.push({ ...warning });
      },
      change: (warning: Warning) => void told.push({ ...warning }),
      noteSwitch: () => {},
      log: (entry: Omit<LogEntry, 'id' | 'time'>) => void log.push(entry),
    },
    serverTime: () => 1000 + now,
    createWatch: () => watch,
    leftOut: () => ({ marks: [], conditions: [] }),
    silent: () => false,
    save: () => {},
    touch: () => {},
    traced: () => {},
  } as unknown as Surroundings;
  const memo = {
    watch: 'w',
    name: 'w',
    model: 'swing',
    channels: ['c'],
    reaction: 0,
    use: 'in use' as const,
    alarm: NO_ALARM,
    gradeSince: null,
  };
  const running = createRunningWatch(memo, model, null, { warnings: [], switches: [] }, around);
  return {
    running,
    log,
    told,
    /** a frame at `time` at which these things happen */
    at(time: number, ...happenings: Happening[]) {
      now = time;
      next = happenings;
      running.push({ channel: 'c', t0: time, dt: 0, times: null, values: Float64Array.of(1) } as Frame);
      return running.state().state;
    },
  };
}

const warning = (at: number): Happening => ({ kind: 'warning', at, value: 2, threshold: 1 }) as Happening;
const graded = (
  at: number,
  outcome: 'true' | 'false' | 'repeat',
  switchAt: number | null = null,
): Happening => ({
  kind: 'graded',
  at,
  outcome,
  switchAt,
  lead: switchAt === null ? null : switchAt - at,
});
const switched = (at: number, warningAt: number | null): Happening => ({
  kind: 'switch',
  at,
  confirmedAt: at,
  from: 0,
  to: 1,
  outcome: warningAt === null ? 'missed' : 'warned',
  warningAt,
  lead: warningAt === null ? null : at - warningAt,
});

describe('the alarm of a running watch', () => {
  it('goes on while a newer warning is open, though the switch of an older one has come', () => {
    const { at } = scripted();
    expect(at(0, warning(0))).toBe('unacknowledged');
    expect(at(11, warning(11))).toBe('unacknowledged');
    // the first came true; the second still speaks for 21 to 31
    expect(at(14, switched(14, 0), graded(0, 'true', 14))).toBe('unacknowledged');
    expect(at(30)).toBe('unacknowledged');
    expect(at(32)).toBe('returned to normal, unacknowledged');
  });

  it('is over with the last open warning, whether its switch came or its span passed', () => {
    const first = scripted();
    first.at(0, warning(0));
    expect(first.at(12, switched(12, 0), graded(0, 'true', 12))).toBe('returned to normal, unacknowledged');
    const second = scripted();
    second.at(0, warning(0));
    expect(second.at(20)).toBe('unacknowledged');
    expect(second.at(20.1)).toBe('returned to normal, unacknowledged');
  });

  it('stays latched until it is acknowledged and reset, if it was asked to latch', () => {
    const { at, running, log } = scripted();
    running.act({ action: 'latch', on: true, by: 'Ada' });
    at(0, warning(0));
    expect(at(21)).toBe('latched, unacknowledged');
    running.act({ action: 'reset', by: 'Ada' });
    expect(running.state().state).toBe('latched, unacknowledged');
    running.act({ action: 'acknowledge', by: 'Ben' });
    expect(running.state().state).toBe('latched, acknowledged');
    running.act({ action: 'reset', by: 'Ben' });
    expect(running.state()).toMatchObject({ state: 'normal', latching: true });
    expect(log.map(({ kind, by }) => [kind, by])).toEqual([
      ['latch', 'Ada'],
      ['acknowledged', 'Ben'],
      ['latch', 'Ben'],
    ]);
  });

  it('takes two clicks for one, and says who set it aside', () => {
    const { at, running, log } = scripted();
    at(0, warning(0));
    for (let click = 0; click < 2; click++) running.act({ action: 'acknowledge', by: 'Ada' });
    for (let click = 0; click < 2; click++)
      running.act({ action: 'take out of service', reason: 'new sensor', by: 'Ben' });
    expect(running.state()).toMatchObject({ state: 'out of service', setAsideBy: 'Ben' });
    for (let click = 0; click < 2; click++) running.act({ action: 'return to service', by: 'Ben' });
    const kinds = log.map(({ kind }) => kind);
    expect(kinds.filter((kind) => kind === 'acknowledged')).toHaveLength(1);
    expect(kinds.filter((kind) => kind === 'in service')).toHaveLength(1);
  });
});

describe('whom a warning called', () => {
  it('is nobody while its watch is shelved, and is said in the warning', () => {
    const { at, running, told } = scripted();
    at(0, warning(0));
    running.act({ action: 'shelve', seconds: 600, reason: 'calibrating', by: 'Ada' });
    at(40, warning(40));
    expect(told.filter(({ outcome }) => outcome === 'open').map(({ at, called }) => [at, called])).toEqual([
      [0, true],
      [40, false],
    ]);
  });
});

describe('a warning that comes too late to speak', () => {
  it('is one made after its span began; without a least lead, after it was over', () => {
    const quiet = (leastLead: number, late: number) => {
      const { at, told } = scripted(leastLead);
      at(late, warning(0));
      return told[0]!.quiet;
    };
    expect([quiet(10, 10), quiet(10, 10.1)]).toEqual([false, true]);
    expect([quiet(0, 0.2), quiet(0, 20), quiet(0, 20.1)]).toEqual([false, false, true]);
  });
});

describe('a warning that was acted on', () => {
  it('is counted apart, outside every ratio, acknowledged, and logged with who did what', () => {
    const { at, running, log, told } = scripted();
    at(0, warning(0));
    at(25, graded(0, 'false'));
    running.tick();
    expect(running.state().grade!.falseRatio.value).toBe(1);
    const acted = running.actOn(1, { acted: true, by: 'Ada', text: 'heater trimmed' });
    expect(acted).toMatchObject({
      outcome: 'acted',
      acted: { by: 'Ada', outcome: 'false' },
      acknowledgedBy: 'Ada',
    });
    running.tick();
    const { grade } = running.state();
    expect(grade!.warnings).toMatchObject({ acted: 1, false: 0, total: 1 });
    expect(grade!.falseRatio.value).toBeNull();
    expect(told.at(-1)!.outcome).toBe('acted');
    expect(log.find(({ kind }) => kind === 'acted')).toMatchObject({
      by: 'Ada',
      text: 'warning 1 was acted on: heater trimmed',
    });
  });

  it('has the outcome it would have had when that is taken back, also one found meanwhile', () => {
    const { at, running } = scripted();
    at(0, warning(0));
    running.actOn(1, { acted: true, by: '', text: '' });
    expect(running.state().state).toBe('normal');
    at(12, switched(12, 0), graded(0, 'true', 12));
    expect(running.actOn(1, { acted: true, by: '', text: '' })!.outcome).toBe('acted');
    expect(running.actOn(1, { acted: false, by: '', text: '' })).toMatchObject({
      outcome: 'true',
      acted: null,
      lead: 12,
    });
    expect(running.actOn(7, { acted: true, by: '', text: '' })).toBeNull();
  });
});
