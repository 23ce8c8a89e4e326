import { describe, expect, it } from 'vitest';
import { secondRegime } from '../../client/regimes.ts';
import { switchAt } from './fixtures.ts';

describe('the second regime is where the switches say', () => {
  it('lies between a switch into it and the switch out of it', () => {
    expect(secondRegime([switchAt(10, 0, 1), switchAt(20, 1, 0)], 0, 50, 0)).toEqual([{ from: 10, to: 20 }]);
  });

  it('reaches to both edges where the paper begins and ends in it', () => {
    expect(secondRegime([switchAt(10, 1, 0), switchAt(20, 0, 1)], 0, 50, 1)).toEqual([
      { from: 0, to: 10 },
      { from: 20, to: 50 },
    ]);
  });

  it('is cut at the edges of the paper', () => {
    expect(secondRegime([switchAt(10, 0, 1), switchAt(90, 1, 0)], 30, 50, null)).toEqual([
      { from: 30, to: 50 },
    ]);
  });

  it('is taken from the regime of now while no switch is known', () => {
    expect(secondRegime([], 0, 50, 1)).toEqual([{ from: 0, to: 50 }]);
    expect(secondRegime([], 0, 50, 0)).toEqual([]);
    expect(secondRegime([], 0, 50, null)).toEqual([]);
  });

  it('is unknown after switches that see one direction only', () => {
    expect(secondRegime([switchAt(10, 0, 1), switchAt(20, 0, 1)], 0, 50, 0)).toEqual([]);
  });

  it('is every second one of several', () => {
    const up = [switchAt(10, 0, 1), switchAt(20, 1, 2), switchAt(30, 2, 3)];
    expect(secondRegime(up, 0, 50, 3)).toEqual([
      { from: 10, to: 20 },
      { from: 30, to: 50 },
    ]);
  });

  it('knows nothing of the time before the watch began', () => {
    const change = { at: 50, from: 1, to: 0 };
    expect(secondRegime([change], 0, 100, 0, 30)).toEqual([{ from: 30, to: 50 }]);
    expect(secondRegime([], 0, 100, 1, 30)).toEqual([{ from: 30, to: 100 }]);
    expect(secondRegime([], 0, 20, 1, 30)).toEqual([]);
  });
});
