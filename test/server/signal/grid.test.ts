import { describe, expect, it } from 'vitest';
import {
  createGrid,
  createGridBlock,
  gridRuns,
  pushGrid,
  usualInterval,
} from '../../../server/signal/grid.ts';

const steps = (times: number[], values: number[], interval = 1, gapIntervals = 3) => {
  const block = createGridBlock(2);
  pushGrid(
    createGrid(interval, gapIntervals),
    Float64Array.from(times),
    0,
    0,
    Float64Array.from(values),
    block,
  );
  return Array.from({ length: block.count }, (_, i) => ({
    time: block.time[i],
    newest: block.newest[i],
    value: block.value[i],
    start: block.starts[i],
  }));
};

describe('samples on a grid', () => {
  it('takes samples within one hundredth of the interval as on the grid, unchanged', () => {
    expect(steps([10, 11.009, 11.991, 13], [1, 2, 3, 4])).toEqual([
      { time: 10, newest: 10, value: 1, start: 1 },
      { time: 11, newest: 11.009, value: 2, start: 0 },
      { time: 12, newest: 11.991, value: 3, start: 0 },
      { time: 13, newest: 13, value: 4, start: 0 },
    ]);
  });

  it('bridges a late sample on the straight line and stamps the step with the sample it needed', () => {
    const bridged = steps([0, 1, 2.5, 3], [0, 1, 2.5, 3]);
    expect(bridged[2]).toEqual({ time: 2, newest: 2.5, value: 2, start: 0 });
    expect(bridged[3]).toEqual({ time: 3, newest: 3, value: 3, start: 0 });
  });

  it('bridges as long as three intervals pass without a sample, and begins a new run beyond', () => {
    expect(steps([0, 3], [0, 3]).map(({ value }) => value)).toEqual([0, 1, 2, 3]);
    expect(steps([0, 3.02], [0, 3]).map(({ time, start }) => [time, start])).toEqual([
      [0, 1],
      [3.02, 1],
    ]);
  });

  it('anchors the grid anew at the first sample after a gap', () => {
    const times = steps([0, 1, 7.3, 8.3], [0, 1, 2, 3]).map(({ time }) => time);
    expect(times).toEqual([0, 1, 7.3, 8.3]);
  });

  it('takes NaN as no sample and passes over samples that are not newer', () => {
    expect(steps([0, 1, 2, 2, 1.5, 3], [0, Number.NaN, 2, 9, 9, 3]).map(({ value }) => value)).toEqual([
      0, 1, 2, 3,
    ]);
  });

  it('tells the gap that a run begins after', () => {
    const block = createGridBlock();
    pushGrid(createGrid(1, 3), null, 100, 10, Float64Array.of(1, 2, 3), block);
    expect(block.gaps).toEqual([
      { from: 100, to: 110, step: 1 },
      { from: 110, to: 120, step: 2 },
    ]);
  });

  it('keeps the sample before instead of the line for marks', () => {
    const runs = gridRuns(Float64Array.of(0, 1, 2.5), Float64Array.of(0, 0, 1), 1, 3, 'previous');
    expect([...runs[0]!.values]).toEqual([0, 0, 0]);
  });

  it('cuts a recording into runs with the times they begin at', () => {
    const runs = gridRuns(Float64Array.of(0, 1, 2, 50, 51), Float64Array.of(5, 6, 7, 8, 9), 1, 3);
    expect(runs.map(({ start, values }) => [start, ...values])).toEqual([
      [0, 5, 6, 7],
      [50, 8, 9],
    ]);
    expect(gridRuns(new Float64Array(0), new Float64Array(0), 1, 3)).toEqual([]);
  });

  it('reads the usual interval off times with jitter, holes and rounding', () => {
    expect(usualInterval(Float64Array.of(0, 0.1, 0.2, 0.30000000000000004, 2))).toBe(0.1);
    expect(usualInterval(Float64Array.from({ length: 300 }, (_, i) => 1796106029.061459 + 0.1 * i))).toBe(
      0.1,
    );
    expect(usualInterval(Float64Array.from({ length: 3000 }, (_, i) => 1.7e9 + i / 30))).toBeCloseTo(
      1 / 30,
      8,
    );
    const jittered = Float64Array.from({ length: 5000 }, (_, i) => 0.4 * i + 0.006 * Math.sin(12.9898 * i));
    expect(usualInterval(jittered)).toBe(0.4);
    expect(usualInterval(Float64Array.of(0, 3600, 7200))).toBe(3600);
  });

  it('says when there are too few times for an interval', () => {
    expect(() => usualInterval(Float64Array.of(1))).toThrow(/needs at least 2/);
  });

  it('stays true to its anchor over a million steps of an interval that is no binary fraction', () => {
    const state = createGrid(0.1, 3);
    const block = createGridBlock();
    pushGrid(state, null, 1.7e9, 0.1, new Float64Array(1_000_000), block);
    expect(block.count).toBe(1_000_000);
    expect(block.time[999_999]).toBeCloseTo(1.7e9 + 99_999.9, 5);
  });
});
