import { describe, expect, it } from 'vitest';
import { createProjection, projectInto } from '../../../server/embedding/projection.ts';
import { createRandom } from '../../../server/rigs/random.ts';

const random = createRandom('projection');
const noise = (length: number) => Float64Array.from({ length }, () => random.gaussian());

/** The sum of the definition, one window and one coordinate at a time, in the stated order. */
function obvious(
  lines: Float64Array[],
  coordinates: Float64Array,
  delays: number,
  rank: number,
  newest: number,
  count: number,
): Float64Array {
  const out = new Float64Array(count * rank);
  for (let i = 0; i < count; i++) {
    for (let k = 0; k < rank; k++) {
      let sum = 0;
      lines.forEach((line, c) => {
        for (let j = 0; j < delays; j++)
          sum += coordinates[(c * delays + j) * rank + k]! * line[newest + i - j]!;
      });
      out[i * rank + k] = sum;
    }
  }
  return out;
}

describe('the projection of delay windows', () => {
  it.each([
    [1, 2, 1],
    [1, 7, 3],
    [1, 100, 15],
    [2, 12, 4],
    [3, 5, 2],
  ])('has the bits of the plain sum, with %i channels, %i delays and rank %i', (channels, delays, rank) => {
    const lines = Array.from({ length: channels }, () => noise(300));
    const coordinates = noise(channels * delays * rank);
    const projection = createProjection(coordinates, channels, delays, rank);
    for (const count of [1, 2, 3, 4, 5, 7, 8, 150]) {
      const out = new Float64Array(count * rank);
      projectInto(projection, lines, delays - 1, count, out);
      expect(out).toEqual(obvious(lines, coordinates, delays, rank, delays - 1, count));
    }
  });

  it('refuses coefficients of another shape, saying which was expected', () => {
    expect(() => createProjection(new Float64Array(10), 1, 4, 3)).toThrow(
      /10 coefficients, expected .* = 12/,
    );
  });
});
