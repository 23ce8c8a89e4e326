import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { gridRecording } from '../../../server/rehearsal/gridded.ts';
import { type Trace, traceOf, warningsInto } from '../../../server/rehearsal/trace.ts';
import { createRandom } from '../../../server/rigs/random.ts';
import {
  breakWatchRule,
  createWatchRuleState,
  type SteppedRule,
  stepWatchRule,
} from '../../../server/watch/watchRule.ts';
import type { Model } from '../../../shared-types/model.ts';

/** A trace with the summary of its blocks, as `traceOf` makes it. */
function traceFrom(value: Float64Array): Trace {
  const blocks = Math.ceil(value.length / 32);
  const block = (b: number) => [...value.subarray(32 * b, 32 * b + 32)];
  const ofBlock = (b: number, pick: (...values: number[]) => number, gap: number) =>
    block(b).some(Number.isNaN) ? gap : pick(...block(b));
  return {
    value,
    time: Float64Array.from(value.keys()),
    stamp: Int32Array.from(value.keys()),
    at: Float64Array.from(value.keys()),
    low: Float64Array.from({ length: blocks }, (_, b) => ofBlock(b, Math.min, Number.NEGATIVE_INFINITY)),
    high: Float64Array.from({ length: blocks }, (_, b) => ofBlock(b, Math.max, Number.POSITIVE_INFINITY)),
  };
}

/** The watch rule stepped over every value, as a live watch does. */
function steppedWarnings(value: Float64Array, rule: SteppedRule): number[] {
  const state = createWatchRuleState();
  const warnings: number[] = [];
  value.forEach((v, i) => {
    if (Number.isNaN(v)) breakWatchRule(state);
    else if (stepWatchRule(state, rule, i * rule.interval, v)) warnings.push(i);
  });
  return warnings;
}

const slowWalk = (seed: number, count: number, gaps: boolean): Float64Array => {
  const random = createRandom(seed);
  let level = 0;
  let blind = 0;
  return Float64Array.from({ length: count }, () => {
    level = 0.9 * level + random.gaussian();
    if (gaps && random.uniform() < 0.01) blind = Math.floor(40 * random.uniform());
    return blind-- > 0 ? Number.NaN : level;
  });
};

describe('the warnings of a trace', () => {
  it('are those of the watch rule stepped over every value, for any rule, gaps included', () => {
    const rules = fc.record({
      sign: fc.constantFrom(1 as const, -1 as const),
      threshold: fc.double({ min: -1, max: 5, noNaN: true }),
      rearmBelow: fc.double({ min: 0, max: 3, noNaN: true }),
      onDelay: fc.integer({ min: 0, max: 4 }),
      holdOff: fc.integer({ min: 0, max: 60 }),
    });
    let issued = 0;
    fc.assert(
      fc.property(fc.nat(1e6), fc.boolean(), rules, (seed, gaps, { rearmBelow, ...given }) => {
        const rule = { ...given, interval: 1, rearm: given.threshold - rearmBelow, leastLead: 1, horizon: 2 };
        const value = slowWalk(seed, 700, gaps);
        const out = new Int32Array(value.length);
        const size = warningsInto(traceFrom(value), value.length, rule, out);
        issued += size;
        expect([...out.subarray(0, size)]).toEqual(steppedWarnings(value, rule));
      }),
      { seed: 4713, numRuns: 400 },
    );
    expect(issued).toBeGreaterThan(1000);
  });
});

/** A model of two delays whose last coordinate is the difference of the two newest samples. */
const model = {
  interval: 1,
  delays: 2,
  rank: 2,
  channels: [{ channel: 'x', unit: '', mean: 5, scale: 1 }],
  coordinates: Float64Array.of(1, 1, 0, -1),
  gapIntervals: 3,
} as unknown as Model;

describe('the trace of a recording', () => {
  const times = Float64Array.of(0, 1, 2, 3, 10, 11, 12.5);
  const values = Float64Array.of(1, 3, 2, 2, 7, 4, 4);
  const recording = gridRecording([{ channel: 'x', times, values }], {
    channels: ['x'],
    interval: 1,
    gapIntervals: 3,
    regime: { kind: 'sides', low: 2.5, high: 3.5 },
    regimeChannel: null,
  });

  it('is the size of the last coordinate wherever the window is full, and nothing elsewhere', () => {
    const { value } = traceOf(model, recording, 'forcing');
    expect([...value]).toEqual([Number.NaN, 2, 1, 0, ...Array(7).fill(Number.NaN), 3, 0]);
  });

  it('is stamped with the newest sample that was needed', () => {
    const { at, stamp } = traceOf(model, recording, 'forcing');
    expect([at[1], at[11], at[12]]).toEqual([1, 11, 12.5]);
    expect([stamp[1], stamp[11], stamp[12]]).toEqual([1, 11, 13]);
  });

  it('can be the level of the channel itself', () => {
    expect(traceOf(model, recording, 'level').value[11]).toBe(4);
  });

  it('knows the switches and where nothing could be seen', () => {
    expect(recording.unseen).toEqual([{ from: 3, to: 10 }]);
    expect(recording.switches).toEqual([]);
    expect([recording.start, recording.end]).toEqual([0, 12]);
  });
});
