import { describe, expect, it } from 'vitest';
import { createDrawingData, draw, gapSeconds } from '../../client/drawingData.ts';
import { NOTHING_YET, reduce } from '../../client/feedState.ts';
import { timeAt } from '../../client/now.ts';
import type { FeedMessage } from '../../shared-types/feed.ts';
import { channel } from './fixtures.ts';

const LOOK = { seconds: 180, columns: 800 };
const state = reduce(NOTHING_YET, { kind: 'channel', channel: channel() });
const signal = (t: number[], v: number[], replace = false): FeedMessage => {
  const values = Float64Array.from(v);
  const columns = { t: Float64Array.from(t), low: values, high: values };
  return { kind: 'signal', channel: 'Loop A', columns, replace, newest: t[t.length - 1] ?? 0, age: 0 };
};

describe('drawing data', () => {
  it('grow by each message and begin anew where a message replaces them', () => {
    const data = createDrawingData();
    draw(data, state, signal([1, 1.4], [5, 6]), LOOK, 100);
    draw(data, state, signal([1.8], [7]), LOOK, 100.4);
    expect(data.signals.get('Loop A')!.points.y).toEqual([5, 6, 7]);
    draw(data, state, signal([1.4, 1.8, 2.2], [6, 7, 8], true), LOOK, 101);
    expect(data.signals.get('Loop A')!.points.y).toEqual([6, 7, 8]);
    expect(data.signals.get('Loop A')!.version).toBe(3);
  });

  it('set the channel’s clock', () => {
    const data = createDrawingData();
    draw(data, state, signal([1, 1.4], [5, 6]), LOOK, 100);
    expect(timeAt(data.clocks.get('Loop A'), 101)).toBeCloseTo(2.4, 9);
  });

  it('keep no more than about two looks of the past', () => {
    const data = createDrawingData();
    for (let i = 0; i < 4000; i++) draw(data, state, signal([i], [0]), LOOK, i);
    expect(data.signals.get('Loop A')!.points.x.length).toBeLessThan(360 + 520);
  });

  it('break the line over a hole, but not between columns as wide as the look makes them', () => {
    expect(gapSeconds(0.4, LOOK)).toBeCloseTo(1.8, 9);
    expect(gapSeconds(0.4, { seconds: 86400, columns: 800 })).toBe(432);
    expect(gapSeconds(null, LOOK)).toBe(Infinity);
  });
});
