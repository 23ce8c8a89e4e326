import { expect, it } from 'vitest';
import { chooseRank } from '../../../server/embedding/rankChoice.ts';
import { evidenceOf } from '../../../server/model/evidence.ts';
import { fitModel } from '../../../server/model/fit.ts';
import { createRandom } from '../../../server/signal/random.ts';

const { gaussian } = createRandom('evidence');
const signal = Float64Array.from({ length: 4000 }, (_, i) => Math.sin(0.2 * i) + 0.1 * gaussian());
const model = fitModel([[signal]], 0.1, {
  name: 'a tone',
  channels: [{ channel: 'x', unit: 'V' }],
  delays: 20,
  rank: null,
  center: 'mean',
  gapIntervals: 3,
});
const evidence = evidenceOf(model);

it('gives the floor that the rank was chosen by: as many singular values stand above it', () => {
  const above = evidence.spectrum.filter((value) => value > evidence.noiseFloor).length;
  expect(above).toBe(chooseRank(model.spectrum, model.diagnostics.windows).rank);
  // a tone fills two directions
  expect(above).toBe(2);
});

it('writes the matrices as rows, and survives JSON', () => {
  expect(evidence.A).toHaveLength(model.rank - 1);
  expect(evidence.A.flat()).toEqual([...model.A]);
  expect(JSON.parse(JSON.stringify(evidence))).toEqual(evidence);
});

it('counts every window once by its forcing, agreeing with its share beyond 2 and its unit rms', () => {
  const { counts, share } = evidence.diagnostics.forcing;
  const total = counts!.counts.reduce((sum, count) => sum + count, 0);
  expect(total).toBe(model.diagnostics.windows);
  const middles = counts!.counts.map((_, i) => counts!.from + (i + 0.5) * counts!.width);
  const beyond = counts!.counts.filter((_, i) => Math.abs(middles[i]!) > 2).reduce((a, b) => a + b, 0);
  expect(beyond / total).toBeCloseTo(share, 10);
  const square = counts!.counts.reduce((sum, count, i) => sum + count * middles[i]! ** 2, 0) / total;
  // Sheppard's correction (1898) for values counted in bins
  expect(square - counts!.width ** 2 / 12).toBeCloseTo(1, 1);
});
