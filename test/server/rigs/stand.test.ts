import { describe, expect, it } from 'vitest';
import { createRandom } from '../../../server/rigs/random.ts';
import { createStand, STAND_INTERVAL, type StandFrame } from '../../../server/rigs/stand.ts';

/** All samples of one channel, in the order they came. */
function joined(frames: StandFrame[], channel: string): { times: number[]; values: number[] } {
  const own = frames.filter((frame) => frame.channel === channel);
  return { times: own.flatMap(({ times }) => [...times]), values: own.flatMap(({ values }) => [...values]) };
}

const hours = createStand('an afternoon').advance(2 * 3600);

describe('the invented stand', () => {
  it('gives the same samples however its time is cut', () => {
    const random = createRandom('cuts');
    const stand = createStand('an afternoon');
    const frames: StandFrame[] = [];
    for (let time = 0; time < 600; time += 3 * random.uniform() ** 2) frames.push(...stand.advance(time));
    frames.push(...stand.advance(600));
    for (const { channel } of stand.channels) {
      const once = joined(createStand('an afternoon').advance(600), channel);
      expect(joined(frames, channel)).toEqual(once);
      expect(once.times.length).toBeGreaterThan(1400);
    }
  });

  it('gives other samples for another seed', () => {
    expect(joined(createStand(1).advance(60), 'Loop A')).not.toEqual(
      joined(createStand(2).advance(60), 'Loop A'),
    );
  });

  it('samples both loops in kelvin, by names and labels of its own', () => {
    const { channels } = createStand(1);
    expect(channels.map(({ channel }) => channel)).toEqual(['Loop A', 'Loop B']);
    for (const { unit, interval } of channels) expect([unit, interval]).toEqual(['K', STAND_INTERVAL]);
  });

  it.each(['Loop A', 'Loop B'])(
    'reverses %s every half minute or so, with an amplitude of a few kelvin',
    (channel) => {
      const { times, values } = joined(hours, channel);
      let side = 0;
      let reversals = 0;
      let squares = 0;
      for (const value of values) {
        const now = value > 0.3 ? 1 : value < -0.3 ? -1 : side;
        if (side !== 0 && now !== side) reversals++;
        side = now;
        squares += value * value;
      }
      const mean = (times.at(-1)! - times[0]!) / reversals;
      expect(mean).toBeGreaterThan(25);
      expect(mean).toBeLessThan(45);
      expect(Math.sqrt(squares / values.length)).toBeGreaterThan(2);
      expect(Math.sqrt(squares / values.length)).toBeLessThan(4);
    },
  );

  it.each(['Loop A', 'Loop B'])(
    'loses about 0.3 %% of the samples of %s and keeps its times rising',
    (channel) => {
      const { times } = joined(hours, channel);
      const expected = (2 * 3600) / STAND_INTERVAL;
      const lost = expected - times.length;
      // five standard deviations of a count around 54
      expect(Math.abs(lost - 0.003 * expected)).toBeLessThan(5 * Math.sqrt(0.003 * expected));
      for (let i = 1; i < times.length; i++)
        if (times[i]! <= times[i - 1]!) expect.fail(`time ${i} does not rise`);
      const off = times.map((time) => Math.abs(time - STAND_INTERVAL * Math.round(time / STAND_INTERVAL)));
      expect(Math.max(...off)).toBeLessThanOrEqual(0.05 * STAND_INTERVAL);
      expect(Math.max(...off)).toBeGreaterThan(0.02 * STAND_INTERVAL);
    },
  );
});
