import { describe, expect, it } from 'vitest';
import { CASES, meanShare, runCase, tableOf } from './lorenz-forcing.ts';

describe.each(CASES)('forcing on noisy Lorenz data, least lead $leastLead, horizon $horizon', (given) => {
  const { leastLead, horizon, least } = given;
  const rows = runCase(leastLead, horizon);
  console.log(tableOf(leastLead, horizon, rows));

  it(`has at least ${least} of the perfect warner's skill with settings from evidence`, () => {
    expect(meanShare(rows, ({ chosen }) => chosen)).toBeGreaterThanOrEqual(least);
  });

  it('does much worse with the published window and rank: less than half of that', () => {
    const published = meanShare(rows, ({ published }) => published);
    expect(published).toBeLessThan(0.5 * meanShare(rows, ({ chosen }) => chosen));
  });

  it('knows more than chance for every seed', () => {
    for (const { chosen } of rows) expect(chosen.score!.pValue).toBeLessThan(0.01);
  });
});
