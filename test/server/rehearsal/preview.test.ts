import { describe, expect, it } from 'vitest';
import { previewRule } from '../../../server/rehearsal/preview.ts';
import { parseRegimeRule } from '../../../server/watch/regimeRuleText.ts';

/** A square wave of 10 s low, 30 s high, in steps of 1 s over 400 s. */
const times = Float64Array.from({ length: 400 }, (_, i) => i);
const values = times.map((time) => (time % 40 < 10 ? -1 : 1));

describe('the preview of a rule', () => {
  it('finds the switches, how often they come and the share of time on each side', () => {
    const preview = previewRule({ times, values }, parseRegimeRule('sides:-0.5,0.5'), 1, 3);
    expect(preview.switches.map(({ at }) => at).slice(0, 4)).toEqual([10, 40, 50, 80]);
    expect(preview.switches[0]).toMatchObject({ from: 0, to: 1 });
    expect(preview.switches).toHaveLength(19);
    expect(preview.perHour).toBeCloseTo((19 / 400) * 3600, 9);
    expect(preview.shares).toEqual([0.25, 0.75]);
  });

  it('gives one share a band, and no switch to a rule that never fires', () => {
    const rule = parseRegimeRule('levels:2,3,4,deadband=0.1');
    const preview = previewRule({ times, values }, rule, 1, 3);
    expect(preview).toEqual({ switches: [], perHour: 0, shares: [1, 0, 0, 0] });
  });

  it('says what is wrong with a rule that contradicts itself', () => {
    const rule = { kind: 'sides', low: 1, high: -1 } as const;
    expect(() => previewRule({ times, values }, rule, 1, 3)).toThrow(/LOW must be below HIGH/);
  });
});
