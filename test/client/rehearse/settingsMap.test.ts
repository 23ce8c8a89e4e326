import { describe, expect, it } from 'vitest';
import { densityOf, mapOf, nextCell } from '../../../client/rehearse/settingsMap.ts';
import { acrossOf, downOf, edgeFor, falseTicks } from '../../../client/rehearse/tradeOffScale.ts';
import type { TriedSetting } from '../../../shared-types/rehearsal.ts';

const tried = (delays: number, rank: number, skill: number, variable = 'forcing'): TriedSetting => ({
  delays,
  window: delays * 0.4,
  rank,
  variable,
  skill,
  detection: 0.9,
  cameTrue: 0.8,
  threshold: 1.7,
});

describe('the map of window against rank', () => {
  const map = mapOf([
    tried(20, 5, 0.6),
    tried(10, 5, 0.3),
    tried(20, 3, -0.1),
    tried(25, 4, 0.1, 'level rising'),
  ]);

  it('has the windows from left to right and the highest rank on top', () => {
    expect(map.windows).toEqual([4, 8]);
    expect(map.ranks).toEqual([5, 3]);
    expect(map.cells.map((row) => row.map((cell) => cell?.skill ?? null))).toEqual([
      [0.3, 0.6],
      [null, -0.1],
    ]);
    expect(map.best).toBe(0.6);
  });

  it('keeps plain levels out of it', () => {
    expect(map.levels.map(({ variable }) => variable)).toEqual(['level rising']);
    expect(mapOf([])).toEqual({ windows: [], ranks: [], cells: [], levels: [], best: 0 });
  });

  it('keeps the better of two of the same window and rank', () => {
    expect(mapOf([tried(20, 5, 0.2), tried(20, 5, 0.4)]).cells[0]![0]!.skill).toBe(0.4);
  });

  it('draws skill as density, and none as blank paper', () => {
    expect([-0.2, 0, 0.5, 1, 1.2, NaN].map(densityOf)).toEqual([0, 0, 0.5, 1, 1, 0]);
  });

  it('is walked with the arrow keys and ends at its edges', () => {
    expect(nextCell(map, { row: 0, column: 0 }, 'ArrowRight')).toEqual({ row: 0, column: 1 });
    expect(nextCell(map, { row: 0, column: 1 }, 'ArrowRight')).toEqual({ row: 0, column: 1 });
    expect(nextCell(map, { row: 0, column: 1 }, 'ArrowDown')).toEqual({ row: 1, column: 1 });
    expect(nextCell(map, { row: 0, column: 0 }, 'ArrowUp')).toEqual({ row: 0, column: 0 });
    expect(nextCell(map, { row: 1, column: 0 }, 'x')).toEqual({ row: 1, column: 0 });
  });
});

describe('the scale of the trade-off curve', () => {
  const scale = { most: 25, left: 50, right: 550, top: 10, bottom: 210 };

  it('draws false warnings by their square root and the share warned as it is', () => {
    expect([0, 1, 4, 25, 99, -1].map((value) => acrossOf(scale, value))).toEqual([
      50, 150, 250, 550, 550, 50,
    ]);
    expect([0, 0.25, 1].map((value) => downOf(scale, value))).toEqual([210, 160, 10]);
  });

  it('holds the whole curve and the ceiling', () => {
    expect(edgeFor([0, 3.1, 18.2], null)).toBeGreaterThanOrEqual(18.2);
    expect(edgeFor([0, 0.2], 4)).toBeGreaterThanOrEqual(4);
    expect(edgeFor([0], null)).toBe(1);
    expect(edgeFor([], null)).toBe(1);
    expect(edgeFor([NaN, 2], null)).toBeGreaterThanOrEqual(2);
  });

  it('has tidy ticks that do not crowd, beginning with none', () => {
    const ticks = falseTicks(scale, 40);
    expect(ticks[0]).toBe(0);
    expect(ticks.at(-1)).toBe(20);
    const places = ticks.map((value) => acrossOf(scale, value));
    places.slice(1).forEach((at, i) => {
      expect(at - places[i]!).toBeGreaterThanOrEqual(40);
    });
    for (const value of ticks.slice(1)) expect([1, 2, 5]).toContain(Number(value.toExponential()[0]));
  });
});
