import { describe, expect, it } from 'vitest';
import { roomHumidity } from '../../../server/commands/roomReadings.ts';
import { createDemoSource, framesOfDue } from '../../../server/commands/standRig.ts';

const START = 1_700_000_000;

describe('the demo rig', () => {
  it('plays real readings whose event is the one that was introduced on purpose', () => {
    const humidity = roomHumidity();
    expect(humidity.length).toBe(4417);
    expect(humidity[0]).toBe(45.93);
    expect(Math.max(...humidity)).toBe(91.61);
  });

  it('names three channels, of which the third says what it is and where it is from', () => {
    const { channels } = createDemoSource('x', START);
    expect(channels.map(({ channel }) => channel)).toEqual(['Loop A', 'Loop B', 'Room humidity']);
    expect(channels[2]!.label).toMatch(/real readings.*10 times faster.*Suthaharan et al\. 2010/);
  });

  it('gives the recent past at once and then what has come since, nothing twice and nothing early', () => {
    const source = createDemoSource('x', START);
    const past = source.due(START + 180);
    for (const { times } of past) {
      expect(times[0]!).toBeLessThan(START + 1);
      expect(times.at(-1)!).toBeLessThanOrEqual(START + 180);
      expect(times.at(-1)!).toBeGreaterThan(START + 178);
    }
    expect(source.due(START + 180)).toEqual([]);
    let now = START + 180;
    const newest = new Map(past.map(({ channel, times }) => [channel, times.at(-1)!]));
    for (let tick = 0; tick < 100; tick++) {
      now += 0.25;
      for (const { channel, times } of source.due(now)) {
        expect(times[0]!).toBeGreaterThan(newest.get(channel)!);
        expect(times.at(-1)!).toBeLessThanOrEqual(now);
        newest.set(channel, times.at(-1)!);
      }
    }
    for (const time of newest.values()) expect(now - time).toBeLessThan(1.5);
  });

  it('plays the readings round when they are over', () => {
    const source = createDemoSource('x', START, Float64Array.of(1, 2, 3));
    const room = source.due(START + 2).find(({ channel }) => channel === 'Room humidity')!;
    // 1700 readings in, three to a round: 1700 mod 3 = 2
    expect([...room.values]).toEqual([3, 1, 2, 3, 1]);
    expect([...room.times].map((time) => time - START)).toEqual([0, 0.5, 1, 1.5, 2]);
  });

  it('cuts the past into frames without losing or moving a sample', () => {
    const due = createDemoSource('x', START).due(START + 180);
    const frames = [...framesOfDue(due, 50)];
    for (const { channel, values } of due) {
      const own = frames.filter(([name]) => name === channel).map(([, frame]) => frame);
      expect(own.every((frame) => frame.values.length <= 50)).toBe(true);
      expect(own.flatMap((frame) => [...frame.values])).toEqual([...values]);
    }
  });
});
