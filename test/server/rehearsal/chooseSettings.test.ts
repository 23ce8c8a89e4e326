import { describe, expect, it } from 'vitest';
import { modelFromJson } from '../../../server/model/modelFile.ts';
import { chooseSettings } from '../../../server/rehearsal/chooseSettings.ts';
import { chooseRule, scoreOfChoice } from '../../../server/rehearsal/modelRule.ts';
import { runRehearsal } from '../../../server/rehearsal/rehearsal.ts';
import type { RehearsalTask } from '../../../server/rehearsal/task.ts';
import { createStand, STAND_LOOPS } from '../../../server/rigs/stand.ts';
import { InputError } from '../../../server/signal/inputError.ts';
import { RehearsalRequest } from '../../../shared-types/rehearsal.ts';

/** A rehearsal of loop A, so many seconds of it, whose forcing alone is watched. */
function taskOf(seconds: number): RehearsalTask {
  const [frame] = createStand('settings', STAND_LOOPS.slice(0, 1)).advance(seconds);
  const series = [{ channel: 'Loop A', unit: 'K', times: frame!.times, values: frame!.values }];
  return {
    request: RehearsalRequest.parse({
      recordings: ['run'],
      channels: ['Loop A'],
      regime: 'sides:-0.3,0.3',
      leastLead: 10,
      horizon: 20,
      variable: 'forcing',
      windows: [8, 10],
      ranks: [2],
    }),
    recordings: [{ name: 'run', sha256: 'ab', series, leftOut: [] }],
    program: 'foreshift test',
    at: '2026-01-01T00:00:00Z',
    interval: 0.4,
  };
}
const task = taskOf(3600);
const model = chooseSettings(task);

describe('the search alone', () => {
  it('chooses what a whole rehearsal of the forcing chooses, with the same score', () => {
    const whole = modelFromJson(runRehearsal(task).model);
    const { operating, verdict, ...rest } = whole;
    expect(operating).not.toBeNull();
    expect(verdict).toBeDefined();
    const { operating: none, ...mine } = model;
    expect(none ?? null).toBeNull();
    expect({ ...mine, diagnostics: null }).toEqual({ ...rest, diagnostics: null });
  });

  it('holds what was asked for', () => {
    const { request } = task;
    const held = chooseSettings({ ...task, request: { ...request, onDelay: 0.8, holdOff: 7, rearm: 0.5 } });
    expect(held.rule).toMatchObject({ onDelay: 0.8, holdOff: 7, rearm: 0.5 });
  });
});

describe('the rule for a model that was fitted before', () => {
  it('has the usual manner, and is chosen on all of the recordings', () => {
    const rule = chooseRule(task, model);
    expect(rule.rearm).toBeCloseTo(0.8 * rule.threshold, 12);
    expect(rule).toMatchObject({ variable: 'forcing', onDelay: 0, holdOff: 10, leastLead: 10, horizon: 20 });
    const half = { ...task, recordings: taskOf(1800).recordings };
    expect(chooseRule(half, model).threshold).not.toBe(rule.threshold);
  });

  it('keeps a re-arm and a hold-off that were asked for', () => {
    const held = { ...task, request: { ...task.request, rearm: 0.4, holdOff: 5 } };
    expect(chooseRule(held, model)).toMatchObject({ rearm: 0.4, holdOff: 5 });
  });

  it('is worth what such a choice on the first half does on the second', () => {
    const score = scoreOfChoice(task, model);
    expect(score.watchedSeconds).toBeGreaterThan(1700);
    expect(score.watchedSeconds).toBeLessThan(1800);
    expect(score.skill!).toBeGreaterThan(0.3);
    expect(score.pValue!).toBeLessThan(0.01);
  });

  it('is worth that with the mean left in, too, where the model was fitted so', () => {
    const [recording] = task.recordings;
    const [series] = recording!.series;
    const values = series!.values.map((value) => value + 3);
    const lifted = { ...recording!, series: [{ ...series!, values }] };
    const request = { ...task.request, regime: 'sides:2.7,3.3' };
    const scores = (['mean', 'none'] as const).map((center) =>
      scoreOfChoice({ ...task, request, recordings: [lifted] }, { ...model, center }),
    );
    expect(scores[0]!.skill!).toBeCloseTo(scoreOfChoice(task, model).skill!, 2);
    expect(scores[1]).not.toEqual(scores[0]);
  });

  it('is refused where no switch is there to choose by', () => {
    const never = { ...task, request: { ...task.request, regime: 'sides:-50,50' } };
    expect(() => chooseRule(never, model)).toThrow(InputError);
  });
});
