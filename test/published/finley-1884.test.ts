/**
 * J. P. Finley (1884), "Tornado predictions", American Meteorological Journal 1, 85–88: 28 hits, 72 false alarms, 23
 * misses, 2680 correct negatives; as discussed by A. H. Murphy (1996), Weather and Forecasting 11, 3–20, and on the
 * page on these forecasts of the joint working group on forecast verification research, where the table and accuracy
 * 96.6 %, accuracy of never forecasting 98.2 %, false alarm ratio 72 %, threat score 23 %, Peirce's score 52 %, bias
 * about 2 and about 2 random hits were read. ETS 0.22 and HSS 0.36 were seen in transcriptions. The ten-digit values
 * are the formulas recomputed; tolerance 1e-9.
 */
import { describe, expect, it } from 'vitest';
import { type ContingencyScores, contingencyScores } from '../../server/rehearsal/verification.ts';
import { createRandom } from '../../server/signal/random.ts';

const finley = contingencyScores({ hits: 28, falseAlarms: 72, misses: 23, correctNegatives: 2680 });

describe("Finley 1884: the tornado forecasts' scores", () => {
  it.each<[keyof ContingencyScores, number]>([
    ['accuracy', 0.9661077417],
    ['neverAccuracy', 0.9818052087],
    ['baseRate', 0.0181947913],
    ['bias', 1.9607843137],
    ['detection', 0.5490196078],
    ['falseAlarmRate', 0.0261627907],
    ['falseAlarmRatio', 0.72],
    ['successRatio', 0.28],
    ['criticalSuccess', 0.2276422764],
    ['randomHits', 1.8194791295],
    ['equitableThreat', 0.2160456209],
    ['peirce', 0.5228568171],
    ['heidke', 0.3553248615],
    ['clayton', 0.271490936],
    ['oddsRatio', 45.3140096618],
    ['logOddsRatio', 3.8136162487],
    ['logOddsRatioError', 0.3057034017],
    ['oddsRatioSkill', 0.9568165224],
    ['extremeDependency', 0.7396483956],
    ['symmetricExtremeDependency', 0.5934674756],
    ['extremalDependence', 0.7173623739],
    ['symmetricExtremalDependence', 0.7528041896],
    ['f1', 0.3708609272],
    ['matthews', 0.3767637014],
    ['peirceError', 0.0697431199],
  ])('%s is %d', (name, value) => {
    expect(Math.abs(finley[name] - value)).toBeLessThan(1e-9);
  });

  it.each<[keyof ContingencyScores, number, number]>([
    ['accuracy', 0.966, 5e-4],
    ['neverAccuracy', 0.982, 5e-4],
    ['detection', 0.55, 5e-3],
    ['falseAlarmRatio', 0.72, 5e-3],
    ['criticalSuccess', 0.23, 5e-3],
    ['peirce', 0.52, 5e-3],
    ['equitableThreat', 0.22, 5e-3],
    ['heidke', 0.36, 5e-3],
  ])('%s reads as printed, %d', (name, printed, half) => {
    expect(Math.abs(finley[name] - printed)).toBeLessThanOrEqual(half);
  });
});

describe('contingency tables of any kind', () => {
  const { uniform } = createRandom('tables');
  const count = () => 1 + Math.floor(500 * uniform());
  const tables = Array.from({ length: 200 }, () =>
    contingencyScores({ hits: count(), falseAlarms: count(), misses: count(), correctNegatives: count() }),
  );

  it('have ETS = HSS/(2 − HSS), CSI = 1/(1/SR + 1/POD − 1), bias = POD/SR', () => {
    for (const one of [finley, ...tables]) {
      expect(one.equitableThreat).toBeCloseTo(one.heidke / (2 - one.heidke), 12);
      expect(one.criticalSuccess).toBeCloseTo(1 / (1 / one.successRatio + 1 / one.detection - 1), 12);
      expect(one.bias).toBeCloseTo(one.detection / one.successRatio, 12);
      expect(one.matthews ** 2).toBeCloseTo(one.peirce * one.clayton, 12);
    }
  });

  it('give a forecaster that knows nothing no skill by any measure', () => {
    const blind = contingencyScores({ hits: 20, falseAlarms: 180, misses: 80, correctNegatives: 720 });
    for (const name of ['equitableThreat', 'peirce', 'heidke', 'clayton', 'oddsRatioSkill'] as const)
      expect(blind[name]).toBeCloseTo(0, 14);
    expect(blind.oddsRatio).toBeCloseTo(1, 14);
  });
});
