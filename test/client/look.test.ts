import { describe, expect, it } from 'vitest';
import { LOOKS, lookFor, nextLook } from '../../client/look.ts';

describe('how much of the past is shown', () => {
  it('is about nine horizons of the farthest-seeing watch', () => {
    expect(lookFor([20, 0.7])).toBe(180);
    expect(lookFor([0.7])).toBe(10);
    expect(lookFor([])).toBe(180);
    expect(lookFor([1e9])).toBe(LOOKS[LOOKS.length - 1]);
  });

  it('goes one step shorter or longer and no further than the ends', () => {
    expect(nextLook(180, 'shorter')).toBe(120);
    expect(nextLook(180, 'longer')).toBe(300);
    expect(nextLook(LOOKS[0]!, 'shorter')).toBe(LOOKS[0]);
    expect(nextLook(86400, 'longer')).toBe(86400);
  });
});
