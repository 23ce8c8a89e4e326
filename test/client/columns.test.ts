import { describe, expect, it } from 'vitest';
import {
  appendColumns,
  createPoints,
  dropFrom,
  indexAtOrAfter,
  nearest,
  type Points,
  pointsOf,
  trimBefore,
} from '../../client/columns.ts';

const columns = (t: number[], low: number[], high = low) => ({
  t: Float64Array.from(t),
  low: Float64Array.from(low),
  high: Float64Array.from(high),
});

function expectSound(points: Points): void {
  expect(points.y.length).toBe(points.x.length);
  for (let i = 1; i < points.x.length; i++) expect(points.x[i]!).toBeGreaterThan(points.x[i - 1]!);
  for (const value of points.y) expect(value === null || Number.isFinite(value)).toBe(true);
}

describe('columns become points', () => {
  it('gives one point for a column of one value', () => {
    const points = createPoints();
    appendColumns(points, columns([1, 2, 3], [4, 5, 6]));
    expect(points).toEqual({ x: [1, 2, 3], y: [4, 5, 6] });
  });

  it('spreads the extremes of a column over its first half, the nearer one first', () => {
    const points = createPoints();
    appendColumns(points, columns([0, 1, 2], [0, -1, -3], [0, 5, 4]));
    expect(points).toEqual({ x: [0, 1, 1.5, 2, 2.5], y: [0, -1, 5, 4, -3] });
  });

  it('breaks the line once at a gap, never with NaN', () => {
    const points = createPoints();
    appendColumns(points, columns([0, 1, 2, 3], [NaN, 1, NaN, NaN]));
    appendColumns(points, columns([4, 5], [NaN, 2]));
    expect(points).toEqual({ x: [1, 2, 5], y: [1, null, 2] });
  });

  it('breaks the line where columns lie further apart than a gap', () => {
    const points = createPoints();
    appendColumns(points, columns([0, 1], [1, 1]), 2.5);
    appendColumns(points, columns([9], [2]), 2.5);
    expect(points).toEqual({ x: [0, 1, 5, 9], y: [1, 1, null, 2] });
  });

  it('lets a column that comes again, fuller, take the place of its first form', () => {
    const points = createPoints();
    appendColumns(points, columns([0, 1, 2], [1, 2, 3]));
    appendColumns(points, columns([2, 3], [2.5, 4], [3.5, 4]));
    expectSound(points);
    expect(points.x).toEqual([0, 1, 2, 2.5, 3]);
    expect(points.y).toEqual([1, 2, 2.5, 3.5, 4]);
  });

  it('passes over columns out of order', () => {
    const points = createPoints();
    appendColumns(points, columns([5, 4, 6], [1, 2, 3]));
    expect(points).toEqual({ x: [5, 6], y: [1, 3] });
  });

  it('stays sound for any division of a stream into messages', () => {
    const t = Array.from({ length: 200 }, (_, i) => i);
    const low = t.map((i) => (i % 17 === 3 ? NaN : Math.sin(i)));
    const high = low.map((value, i) => (i % 3 === 0 ? value + 1 : value));
    for (const size of [1, 2, 7, 50, 200]) {
      const points = createPoints();
      for (let i = 0; i < 200; i += size)
        appendColumns(points, columns(t.slice(i, i + size), low.slice(i, i + size), high.slice(i, i + size)));
      expectSound(points);
      const drawn = points.y.filter((value) => value !== null);
      expect(Math.max(...drawn)).toBeCloseTo(Math.max(...high.filter(Number.isFinite)), 12);
    }
  });
});

describe('a line is kept short', () => {
  it('keeps the one point before the edge, so that the line enters there', () => {
    const points: Points = { x: [0, 1, 2, 3, 4], y: [0, 1, 2, 3, 4] };
    trimBefore(points, 2.5, 0);
    expect(points).toEqual({ x: [2, 3, 4], y: [2, 3, 4] });
  });

  it('leaves a small surplus where it is', () => {
    const points: Points = { x: [0, 1, 2, 3], y: [0, 1, 2, 3] };
    trimBefore(points, 3, 5);
    expect(points.x).toEqual([0, 1, 2, 3]);
  });

  it('drops the end from a time on', () => {
    const points: Points = { x: [0, 1, 2], y: [0, null, 2] };
    dropFrom(points, 1);
    expect(points).toEqual({ x: [0], y: [0] });
  });
});

describe('a line is read', () => {
  it('finds the first index at or after a time', () => {
    const x = [1, 2, 2.5, 7];
    for (const time of [0, 1, 1.5, 2, 2.2, 7, 8])
      expect(indexAtOrAfter(x, time)).toBe(x.filter((each) => each < time).length);
  });

  it('reads the nearest point, nothing in a gap and nothing too far away', () => {
    const points: Points = { x: [0, 1, 2, 3], y: [10, 11, null, 13] };
    expect(nearest(points, 0.9, 1)).toEqual({ time: 1, value: 11 });
    expect(nearest(points, 2.1, 1)).toBeNull();
    expect(nearest(points, 9, 1)).toBeNull();
    expect(nearest(createPoints(), 0, 1)).toBeNull();
  });

  it('makes a line of fetched columns, null for a gap', () => {
    expect(pointsOf({ t: [0, 1, 2], low: [1, null, 3], high: [1, null, 3] })).toEqual({
      x: [0, 1, 2],
      y: [1, null, 3],
    });
  });
});
