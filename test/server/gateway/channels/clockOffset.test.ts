import { describe, expect, it } from 'vitest';
import {
  channelTime,
  createClockOffset,
  noteArrival,
} from '../../../../server/gateway/channels/clockOffset.ts';

/** Arrivals every `every` seconds of the clock, `pace` seconds of channel time for each. */
function run(
  clock: ReturnType<typeof createClockOffset>,
  from: { time: number; arrival: number },
  seconds: number,
  pace: number,
) {
  const every = 0.1;
  let { time, arrival } = from;
  for (let passed = 0; passed < seconds; passed += every) {
    arrival += every;
    time += every * pace;
    noteArrival(clock, time, arrival);
  }
  return { time, arrival };
}

describe('the offset of a channel clock', () => {
  it('is what separates the clocks when frames come steadily', () => {
    const clock = createClockOffset(null);
    const end = run(clock, { time: 50, arrival: 1050 }, 5, 1);
    expect(channelTime(clock, end.arrival)).toBeCloseTo(end.time, 6);
  });

  it('does not take data sent after a break for a slow clock', () => {
    const clock = createClockOffset(null);
    const before = run(clock, { time: 0, arrival: 1000 }, 20, 1);
    const held = { time: before.time, arrival: before.arrival + 600 };
    const during = run(clock, held, 30, 20);
    expect(channelTime(clock, during.arrival)! - during.time).toBeCloseTo(30, 3);
    const after = run(clock, during, 3, 11);
    expect(channelTime(clock, after.arrival)! - after.time).toBeCloseTo(0, 3);
  });

  it('follows a channel that was paused, once it has kept pace for a while', () => {
    const clock = createClockOffset(null);
    const before = run(clock, { time: 0, arrival: 1000 }, 20, 1);
    const paused = { time: before.time, arrival: before.arrival + 600 };
    const soon = run(clock, paused, 2, 1);
    expect(channelTime(clock, soon.arrival)! - soon.time).toBeCloseTo(600, 3);
    const later = run(clock, soon, 12, 1);
    expect(channelTime(clock, later.arrival)! - later.time).toBeCloseTo(0, 3);
  });

  it('takes a past of the last minutes, sent first, for held up', () => {
    const clock = createClockOffset(null);
    noteArrival(clock, 1_800_000_000 - 180, 1_800_000_000);
    expect(channelTime(clock, 1_800_000_000)).toBe(1_800_000_000);
  });

  it('is unknown before the first sample, and is what was stored after a restart', () => {
    expect(channelTime(createClockOffset(null), 5)).toBeNull();
    expect(channelTime(createClockOffset(2), 5)).toBe(3);
  });
});
