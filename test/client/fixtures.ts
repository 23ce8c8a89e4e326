import type { ChannelState } from '../../shared-types/channel.ts';
import type { Score } from '../../shared-types/score.ts';
import type { SwitchEvent, Warning } from '../../shared-types/warning.ts';
import type { WatchState } from '../../shared-types/watch.ts';

const NONE = { value: null, low: null, high: null };

export function channel(changes: Partial<ChannelState> = {}): ChannelState {
  return {
    channel: 'Loop A',
    unit: 'K',
    label: '',
    interval: 0.4,
    low: null,
    high: null,
    first: 1_700_000_000,
    newest: 1_700_000_600,
    value: 1,
    age: 0,
    connected: true,
    silent: false,
    clockOffset: 0,
    samples: 1500,
    holes: 0,
    gaps: 0,
    saturated: 0,
    rate: 2.5,
    refused: 0,
    refusal: null,
    ...changes,
  };
}

export function score(changes: Partial<Score> = {}): Score {
  return {
    switches: { total: 154, warned: 141, late: 12, missed: 1, blind: 0 },
    warnings: { total: 160, true: 141, repeat: 10, late: 4, false: 5, open: 0, unseen: 0, acted: 0 },
    detection: { value: 0.92, low: 0.86, high: 0.95 },
    cameTrue: { value: 0.97, low: 0.92, high: 0.99 },
    falseRatio: NONE,
    falsePerHour: NONE,
    lead: { median: 16, p10: 11, p90: 19, random: 7 },
    tau: 0.2,
    skill: 0.7,
    skillShare: 0.8,
    pValue: 0.002,
    watchedSeconds: 3600,
    ...changes,
  };
}

export function watch(changes: Partial<WatchState> = {}): WatchState {
  return {
    watch: 'a',
    name: 'Loop A',
    model: 'loop-a',
    channels: ['Loop A'],
    use: 'in use',
    state: 'normal',
    shelvedUntil: null,
    reason: null,
    setAsideBy: null,
    latching: false,
    trigger: false,
    window: 8,
    delays: 20,
    rank: 5,
    interval: 0.4,
    rule: {
      variable: 'forcing',
      direction: 'rising',
      threshold: 1.7,
      rearm: 1.36,
      onDelay: 0,
      holdOff: 10,
      leastLead: 10,
      horizon: 20,
    },
    regime: null,
    regimeChannel: null,
    switchWord: 'reversal',
    sight: { kind: 'seeing' },
    likeness: { kind: 'like' },
    value: null,
    at: null,
    leftOut: null,
    waitsFor: null,
    regimeNow: 0,
    promise: score(),
    grade: null,
    verdict: null,
    gradeAtDelivery: null,
    heardSince: null,
    gradeSince: null,
    ...changes,
  };
}

export function warning(changes: Partial<Warning> = {}): Warning {
  return {
    id: 1,
    watch: 'a',
    model: 'loop-a',
    channels: ['Loop A'],
    at: 1_700_000_600,
    from: 1_700_000_610,
    to: 1_700_000_620,
    madeAt: 1_700_000_600,
    deliveredAt: 1_700_000_600,
    variable: 'forcing',
    value: 1.9,
    threshold: 1.7,
    outcome: 'open',
    switchAt: null,
    lead: null,
    acknowledgedAt: null,
    acknowledgedBy: null,
    quiet: false,
    ...changes,
  };
}

export function switchAt(
  at: number,
  from: number,
  to: number,
  changes: Partial<SwitchEvent> = {},
): SwitchEvent {
  return {
    id: at,
    watch: 'a',
    channel: 'Loop A',
    at,
    confirmedAt: at,
    from,
    to,
    outcome: 'warned',
    warning: null,
    lead: null,
    ...changes,
  };
}
