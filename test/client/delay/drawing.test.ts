import { describe, expect, it } from 'vitest';
import { stretches } from '../../../client/delay/drawing.ts';
import { delay } from './fixtures.ts';

describe('the parts of a delay', () => {
  it('stand one behind the other and fill as much of the lane as they take of it', () => {
    const parts = stretches(delay(), 0.63);
    expect(parts[0]).toEqual({ name: 'rig', from: 0, to: expect.closeTo(0.25 / 0.63, 9) });
    parts.slice(1).forEach(({ from }, i) => {
      expect(from).toBe(parts[i]!.to);
    });
    expect(parts.at(-1)!.to).toBeCloseTo(0.5, 9);
  });

  it('that were not measured take no room, and what reaches beyond the lane is cut', () => {
    const missing = { seconds: null, how: 'not measured' as const, text: '' };
    const parts = stretches(delay({ network: missing }), 0.2);
    expect(parts.map(({ from, to }) => [from, to])).toEqual([
      [0, 1],
      [1, 1],
      [1, 1],
      [1, 1],
    ]);
  });
});
