import { describe, expect, it } from 'vitest';
import { lookForRule, proposeRule } from '../../../server/rehearsal/proposal.ts';
import { createStand, STAND_LOOPS } from '../../../server/rigs/stand.ts';
import { createRandom } from '../../../server/signal/random.ts';
import { parseRegimeRule } from '../../../server/watch/regimeRuleText.ts';

const { gaussian, uniform } = createRandom('proposals');
const COUNT = 20_000;
const times = Float64Array.from({ length: COUNT }, (_, i) => i * 0.1);

/** Two sides around ±2, changed every 500 samples. */
const sides = times.map((_, i) => (Math.floor(i / 500) % 2 === 0 ? -2 : 2) + 0.5 * gaussian());
/** Noise with a spike of a second every 60 s; `triples`: three spikes 4 s apart instead of one. */
const spikes = (height: number, triples = false) =>
  times.map((time) => {
    const phase = time % 60;
    const within = phase % 4 < 1 && phase < (triples ? 12 : 4);
    return (within ? height : 0) + 0.1 * gaussian();
  });

describe('the rule proposed from the data', () => {
  it('is two-sided for values with two humps, the levels on either side of the valley', () => {
    const rule = parseRegimeRule(proposeRule(times, sides)!.rule);
    expect(rule.kind).toBe('sides');
    if (rule.kind !== 'sides') return;
    expect(rule.low).toBeGreaterThan(-1.7);
    expect(rule.low).toBeLessThan(-0.2);
    expect(rule.high).toBeGreaterThan(0.2);
    expect(rule.high).toBeLessThan(1.7);
  });

  it('is an excursion for a long tail upwards and a dip for one downwards', () => {
    const up = parseRegimeRule(proposeRule(times, spikes(5))!.rule);
    expect(up).toMatchObject({ kind: 'excursion', gap: 0 });
    const down = parseRegimeRule(proposeRule(times, spikes(-5))!.rule);
    expect(down.kind).toBe('dip');
    if (up.kind !== 'excursion' || down.kind !== 'dip') return;
    expect(up.level).toBeGreaterThan(2);
    expect(up.level).toBeLessThan(4);
    expect(down.level).toBeLessThan(-2);
    expect(up.rearm).toBeLessThan(up.level);
  });

  it('joins rises that come in bursts', () => {
    const rule = parseRegimeRule(proposeRule(times, spikes(5, true))!.rule);
    expect(rule.kind === 'excursion' && rule.gap > 4 && rule.gap < 52).toBe(true);
  });

  it('is two-sided for a loop that circulates one way for several orbits, though its values have one hump', () => {
    const [loop] = createStand('proposals', STAND_LOOPS.slice(1)).advance(3600);
    const { rule, why } = lookForRule(loop!.times, loop!.values);
    const parsed = parseRegimeRule(rule!);
    expect(parsed.kind).toBe('sides');
    if (parsed.kind !== 'sides') return;
    expect(parsed.low).toBeGreaterThan(-1.5);
    expect(parsed.low).toBeLessThan(0);
    expect(parsed.high).toBeGreaterThan(0);
    expect(parsed.high).toBeLessThan(1.5);
    // an orbit of this loop takes about 15 s
    expect(Number(/every (\d+) s/.exec(why)![1])).toBeGreaterThan(11);
    expect(Number(/every (\d+) s/.exec(why)![1])).toBeLessThan(18);
  });

  it.each([0.5, 0.9, 0.97, 0.99])(
    'is none for red noise of coefficient %s: its swings keep no pace',
    (phi) => {
      let x = 0;
      const red = times.map(() => {
        x = phi * x + gaussian();
        return x;
      });
      expect(proposeRule(times, red)).toBeNull();
    },
  );

  it.each([
    ['one hump', times.map(() => gaussian())],
    ['an even spread', times.map(() => uniform())],
    ['a constant', times.map(() => 3)],
    ['few values', Float64Array.from([1, 2, 3])],
    ['no values', times.map(() => Number.NaN)],
  ])('is none for %s, with the reason', (_, values) => {
    expect(proposeRule(times.subarray(0, values.length), values)).toBeNull();
    expect(lookForRule(times.subarray(0, values.length), values).why.length).toBeGreaterThan(10);
  });

  it('moves and scales with the signal', () => {
    const rule = parseRegimeRule(proposeRule(times, sides)!.rule);
    const moved = parseRegimeRule(
      proposeRule(
        times,
        sides.map((value) => 1000 + 0.01 * value),
      )!.rule,
    );
    if (rule.kind !== 'sides' || moved.kind !== 'sides') throw new Error('expected two sides');
    expect((moved.low - 1000) * 100).toBeCloseTo(rule.low, 0);
    expect((moved.high - 1000) * 100).toBeCloseTo(rule.high, 0);
  });
});
