import { describe, expect, it } from 'vitest';
import { createProjection, projectInto } from '../../../server/embedding/projection.ts';
import { fitModel } from '../../../server/model/fit.ts';
import { createValidity, validityInto } from '../../../server/model/validity.ts';
import { lorenzStates } from '../../../server/rigs/lorenz.ts';
import { createRandom } from '../../../server/rigs/random.ts';
import { column } from '../../../server/rigs/rungeKutta.ts';

const { gaussian } = createRandom(8);
const states = lorenzStates({ start: [-8, 8, 27], step: 0.01, every: 2, samples: 4000 });
const signals = [0, 2].map((index) => column(states, 3, index).map((value) => value + 0.08 * gaussian()));

function measured(channels: number) {
  const runs = [signals.slice(0, channels)];
  const names = ['x', 'z'].slice(0, channels).map((channel) => ({ channel, unit: '' }));
  const model = fitModel(runs, 0.02, {
    name: '',
    channels: names,
    delays: 10,
    rank: 4,
    center: 'mean',
    gapIntervals: 3,
  });
  const lines = runs[0]!.map((values, c) => values.map((value) => value - model.channels[c]!.mean));
  const count = lines[0]!.length - 9;
  const coordinates = new Float64Array(4 * count);
  projectInto(createProjection(model.coordinates, channels, 10, 4), lines, 9, count, coordinates);
  const validity = createValidity(model, model.diagnostics.windows);
  const spe = new Float64Array(count);
  const t2 = new Float64Array(count);
  validityInto(validity, lines, 9, count, coordinates, spe, t2);
  return { model, lines, count, coordinates, validity, spe, t2 };
}

describe('SPE and T²', () => {
  it.each([1, 2])('average to the variance left out and to the rank, for %i channel(s)', (channels) => {
    const { model, count, spe, t2 } = measured(channels);
    const unit = channels === 1 ? 1 / model.channels[0]!.scale ** 2 : 1;
    const left = model.spectrum.slice(4).reduce((sum, s) => sum + (s * s * unit) / count, 0);
    const mean = (values: Float64Array) => values.reduce((sum, value) => sum + value, 0) / count;
    expect(mean(spe) / left).toBeCloseTo(1, 8);
    expect(mean(t2)).toBeCloseTo(4, 9);
  });

  it('are the same bits for any framing', () => {
    const { lines, count, coordinates, validity, spe, t2 } = measured(2);
    const one = new Float64Array(64);
    const other = new Float64Array(64);
    for (let from = 0, size = 1; from < count; from += size, size = (size * 7 + 3) % 64 || 1) {
      const length = Math.min(size, count - from);
      validityInto(validity, lines, 9 + from, length, coordinates.subarray(4 * from), one, other);
      for (let i = 0; i < length; i++) {
        expect(one[i]).toBe(spe[from + i]);
        expect(other[i]).toBe(t2[from + i]);
      }
    }
  });

  it('leave about one training window in a thousand beyond each limit', () => {
    const { model } = measured(1);
    expect(model.validity!.beyond).toBeGreaterThan(0);
    expect(model.validity!.beyond).toBeLessThan(0.0025);
  });

  it('find a spike unlike the training data', () => {
    const { model, lines, validity } = measured(1);
    const spiked = [lines[0]!.map((value, i) => (i === 1000 ? value + 20 : value))];
    const projection = createProjection(model.coordinates, 1, 10, 4);
    const coordinates = new Float64Array(4);
    const spe = new Float64Array(1);
    const t2 = new Float64Array(1);
    projectInto(projection, spiked, 1003, 1, coordinates);
    validityInto(validity, spiked, 1003, 1, coordinates, spe, t2);
    expect(spe[0]).toBeGreaterThan(10 * model.validity!.spe);
  });
});
