import { describe, expect, it } from 'vitest';
import { emptyTally } from '../../../server/rehearsal/tally.ts';
import { choosePoint, type OperatingPoint } from '../../../server/rehearsal/threshold.ts';
import { watchRuleWithDefaults } from '../../../server/watch/watchRule.ts';

function point(threshold: number, given: Partial<OperatingPoint>): OperatingPoint {
  return {
    rule: watchRuleWithDefaults({
      variable: 'forcing',
      direction: 'rising',
      threshold,
      leastLead: 1,
      horizon: 3,
    }),
    tally: emptyTally(),
    folds: [],
    warnings: 10,
    skill: 0.5,
    detection: 0.9,
    cameTrue: 0.8,
    falsePerHour: 1,
    ...given,
  };
}

const chosen = (points: OperatingPoint[], ceiling: Parameters<typeof choosePoint>[1] = null) => {
  const found = choosePoint(points, ceiling);
  return found === null ? null : { threshold: found.point.rule.threshold, weak: found.weak };
};

describe('choosing a threshold', () => {
  it('takes the highest skill among those of which half come true', () => {
    const points = [
      point(1, { skill: 0.7, cameTrue: 0.49 }),
      point(2, { skill: 0.6, cameTrue: 0.5 }),
      point(3, { skill: 0.55, cameTrue: 0.9 }),
    ];
    expect(chosen(points)).toEqual({ threshold: 2, weak: false });
  });

  it('takes the plain maximum and calls it weak when none has half come true', () => {
    const points = [point(1, { skill: 0.3, cameTrue: 0.2 }), point(2, { skill: 0.4, cameTrue: 0.1 })];
    expect(chosen(points)).toEqual({ threshold: 2, weak: true });
  });

  it('keeps within a ceiling of false warnings an hour, whatever share comes true', () => {
    const points = [
      point(1, { skill: 0.7, falsePerHour: 3 }),
      point(2, { skill: 0.6, falsePerHour: 2, cameTrue: 0.3 }),
      point(3, { skill: 0.5, falsePerHour: 0 }),
    ];
    expect(chosen(points, { falsePerHour: 2, cameTrue: null })).toEqual({ threshold: 2, weak: false });
    expect(chosen(points, { falsePerHour: 1, cameTrue: 0.7 })).toEqual({ threshold: 3, weak: false });
    expect(chosen(points, { falsePerHour: null, cameTrue: 0.95 })).toEqual({ threshold: 1, weak: true });
  });

  it('gives a tie to the one with fewer warnings', () => {
    const points = [point(1, { warnings: 12 }), point(2, { warnings: 9 }), point(3, { warnings: 11 })];
    expect(chosen(points)).toEqual({ threshold: 2, weak: false });
  });

  it('chooses nothing among nothing', () => {
    expect(chosen([])).toBeNull();
  });
});
