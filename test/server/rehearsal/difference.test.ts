import { describe, expect, it } from 'vitest';
import { skillDifference } from '../../../server/rehearsal/difference.ts';
import { createRandom } from '../../../server/signal/random.ts';

/** Each event with a thousand watched steps before it, of which the same share lies in spans. */
const judged = (warned: number[], tau: number) => ({
  warned: Uint8Array.from(warned),
  watched: Int32Array.from(warned, () => 1000),
  spanned: Int32Array.from(warned, () => Math.round(1000 * tau)),
});
const many = (count: number, of: number) => Array.from({ length: of }, (_, i) => Number(i < count));

describe('the difference in skill of two warners on the same events', () => {
  it('is that of the detections less that of the shares of time', () => {
    const { value } = skillDifference(
      judged([1, 1, 1, 0], 0.3),
      judged([1, 0, 0, 0], 0.1),
      createRandom(1).uniform,
    );
    expect(value).toBeCloseTo(0.5 - 0.2, 12);
  });

  it('is certain for warners that warn of the same events', () => {
    const same = many(30, 50);
    const { value, low, high } = skillDifference(
      judged(same, 0.25),
      judged(same, 0.3),
      createRandom(1).uniform,
    );
    for (const one of [value, low, high]) expect(one).toBeCloseTo(0.05, 12);
  });

  it('has the interval of the binomial law where only one of the two may warn', () => {
    // 60 of 100 against none: the normal approximation is 0.6 ± 1.96 · √(0.6 · 0.4/100)
    const { low, high } = skillDifference(
      judged(many(60, 100), 0),
      judged(many(0, 100), 0),
      createRandom(1).uniform,
    );
    expect(low).toBeCloseTo(0.6 - 0.096, 1);
    expect(high).toBeCloseTo(0.6 + 0.096, 1);
  });

  it('is not certain where the same events are warned of but the time in spans comes and goes', () => {
    const same = many(30, 50);
    const theirs = judged(same, 0.3);
    // twice the time in spans before every second event: on average as much as the other
    const ours = { ...theirs, spanned: Int32Array.from(same, (_, i) => (i % 2 === 0 ? 600 : 0)) };
    const { value, low, high } = skillDifference(ours, theirs, createRandom(1).uniform);
    expect(value).toBeCloseTo(0, 12);
    // the standard error of the mean of fifty draws of ±0.3 is 0.3/√50 = 0.042
    expect(low).toBeCloseTo(-1.96 * 0.042, 1);
    expect(high).toBeCloseTo(1.96 * 0.042, 1);
    expect(high - low).toBeGreaterThan(0.12);
  });

  it('weighs each event with the time before it', () => {
    const one = {
      warned: Uint8Array.of(1, 0),
      watched: Int32Array.of(100, 300),
      spanned: Int32Array.of(50, 30),
    };
    const none = {
      warned: Uint8Array.of(0, 0),
      watched: Int32Array.of(100, 300),
      spanned: Int32Array.of(0, 0),
    };
    expect(skillDifference(one, none, createRandom(1).uniform, 400)).toEqual({
      value: 0.5 - 80 / 400,
      low: 0 - 30 / 300,
      high: 1 - 50 / 100,
    });
  });

  it('covers no difference in about nineteen of twenty cases when there is none', () => {
    const { uniform } = createRandom('coverage');
    let covered = 0;
    for (let round = 0; round < 200; round++) {
      const draw = () => Array.from({ length: 60 }, () => Number(uniform() < 0.7));
      const { low, high } = skillDifference(judged(draw(), 0.2), judged(draw(), 0.2), uniform, 400);
      if (low <= 0 && high >= 0) covered++;
    }
    expect(covered).toBeGreaterThan(180);
    expect(covered).toBeLessThan(200);
  });
});
