/**
 * J. A. Hanley, B. J. McNeil (1982), "The meaning and use of the area under a receiver operating characteristic (ROC)
 * curve", Radiology 143, 29–36: 109 tomograms in five ratings. The counts, the area 0.893 and the standard error 0.032
 * are from memory; the counts give just these. U = 2642, A = 2642/2958 = 0.8931710615 (`wilcox.test` of base R
 * gives the same), error from the data 0.03199, by the exponential approximation 0.03249, and the points are recomputed.
 */
import { describe, expect, it } from 'vitest';
import { ratingsOf, rocArea } from '../../server/rehearsal/verification.ts';
import { createRandom } from '../../server/signal/random.ts';

const NORMAL = [33, 6, 6, 11, 2];
const ABNORMAL = [3, 2, 2, 11, 33];
const found = rocArea(NORMAL.map((others, i) => ({ others, events: ABNORMAL[i]! })));

describe('Hanley and McNeil 1982: tomograms in five ratings', () => {
  it('have U = 2642 of 2958 pairs, the area 0.8931710615', () => {
    expect(found.wins).toBe(2642);
    expect(Math.abs(found.area - 0.8931710615)).toBeLessThan(5e-11);
    expect(Math.abs(found.area - 0.893)).toBeLessThanOrEqual(5e-4);
  });

  it('have the standard errors 0.03199 from the data and 0.03249 by approximation', () => {
    expect(Math.abs(found.error - 0.03199)).toBeLessThanOrEqual(5e-6);
    expect(Math.abs(found.exponentialError - 0.03249)).toBeLessThanOrEqual(5e-6);
    expect(Math.abs(found.error - 0.032)).toBeLessThanOrEqual(5e-4);
  });

  it('have the points (0.0345, 0.6471), (0.2241, 0.8627), (0.3276, 0.9020), (0.4310, 0.9412)', () => {
    const stated = [
      [0, 0],
      [0.0345, 0.6471],
      [0.2241, 0.8627],
      [0.3276, 0.902],
      [0.431, 0.9412],
      [1, 1],
    ];
    expect(found.points).toHaveLength(stated.length);
    stated.forEach(([falseAlarmRate, detection], i) => {
      expect(Math.abs(found.points[i]!.falseAlarmRate - falseAlarmRate!)).toBeLessThanOrEqual(5e-5);
      expect(Math.abs(found.points[i]!.detection - detection!)).toBeLessThanOrEqual(5e-5);
    });
  });
});

describe('the area below the ROC curve', () => {
  const { uniform, gaussian } = createRandom('ratings');
  const happened = Array.from({ length: 400 }, () => Number(uniform() < 0.3));
  const values = happened.map((event) => Math.round(4 * (gaussian() + event)) / 4);
  const { area, points, error } = rocArea(ratingsOf(values, happened));

  it('is the share of pairs in the right order, a tie counting half', () => {
    let wins = 0;
    let pairs = 0;
    values.forEach((value, i) => {
      if (happened[i] === 0) return;
      values.forEach((other, j) => {
        if (happened[j] === 1) return;
        pairs++;
        wins += value > other ? 1 : value === other ? 0.5 : 0;
      });
    });
    expect(area).toBeCloseTo(wins / pairs, 12);
  });

  it('is that of the trapezia below its points', () => {
    let sum = 0;
    for (let i = 1; i < points.length; i++) {
      const [from, to] = [points[i - 1]!, points[i]!];
      sum += ((to.falseAlarmRate - from.falseAlarmRate) * (to.detection + from.detection)) / 2;
    }
    expect(area).toBeCloseTo(sum, 12);
  });

  it('is for two normal ratings one deviation apart Φ(1/√2) = 0.7602, within its error', () => {
    expect(Math.abs(area - 0.7602)).toBeLessThan(4 * error);
  });

  it('turns about one half when the ratings change sign', () => {
    const mirrored = rocArea(
      ratingsOf(
        values.map((value) => -value),
        happened,
      ),
    );
    expect(mirrored.area).toBeCloseTo(1 - area, 12);
    expect(mirrored.error).toBeCloseTo(error, 12);
  });
});
