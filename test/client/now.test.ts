import { describe, expect, it } from 'vitest';
import { createClock, steer, timeAt } from '../../client/now.ts';

describe('now is the newest sample’s time plus the time since it arrived', () => {
  it('is not known before the first report', () => {
    expect(timeAt(createClock(), 5)).toBeNull();
    expect(timeAt(undefined, 5)).toBeNull();
  });

  it('goes on by the monotonic clock between reports', () => {
    const clock = createClock();
    steer(clock, 1000, 0.5, 10);
    expect(timeAt(clock, 10)).toBe(1000.5);
    expect(timeAt(clock, 13)).toBe(1003.5);
  });

  it('never lags behind a sample that is there', () => {
    const clock = createClock();
    steer(clock, 1000, 0, 10);
    steer(clock, 1005, 0, 11);
    expect(timeAt(clock, 11)).toBe(1005);
  });

  it('lets a clock that runs ahead back by small steps', () => {
    const clock = createClock();
    steer(clock, 1000, 0, 10);
    steer(clock, 1000.6, 0, 11);
    const after = timeAt(clock, 11)!;
    expect(after).toBeLessThan(1001);
    expect(after).toBeGreaterThan(1000.95);
    for (let i = 0; i < 200; i++) steer(clock, 1001.6 + i, 0, 12 + i);
    expect(timeAt(clock, 12)).toBeCloseTo(1001.6, 3);
  });

  it('is set anew when the channel’s time has jumped back', () => {
    const clock = createClock();
    steer(clock, 1_700_000_000, 0, 10);
    steer(clock, 0, 0, 11);
    expect(timeAt(clock, 11)).toBe(0);
  });
});
