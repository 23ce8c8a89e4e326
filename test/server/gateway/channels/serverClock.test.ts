import { describe, expect, it } from 'vitest';
import { createChannelClocks } from '../../../../server/gateway/channels/channelClocks.ts';
import { createChannels } from '../../../../server/gateway/channels/channels.ts';
import { createServerClock } from '../../../../server/gateway/channels/serverClock.ts';

/** A machine whose clock can be set, checked once a second. */
function machine() {
  const at = { wall: 1_800_000_000, monotonic: 5 };
  const clock = createServerClock({ wall: () => at.wall, monotonic: () => at.monotonic });
  const go = (seconds: number, rate = 1) => {
    const steps = [];
    for (let s = 0; s < seconds; s++) {
      at.monotonic += 1;
      at.wall += rate;
      steps.push(clock.check());
    }
    return steps.filter((step) => step !== null);
  };
  const apart = () => at.wall - clock.now().server;
  return { at, clock, go, apart };
}

describe("the server's clock", () => {
  it('goes along with a clock that is slewed, without a word', () => {
    const { go, apart } = machine();
    expect(go(3600, 1 + 400e-6)).toEqual([]);
    expect(Math.abs(apart())).toBeLessThan(0.001);
  });

  it('comes back to a clock that drifted by less than a step, at 500 parts in a million', () => {
    const { at, go, apart } = machine();
    at.wall += 0.9;
    expect(go(1000)).toEqual([]);
    expect(apart()).toBeCloseTo(0.4, 3);
    go(1000);
    expect(apart()).toBeCloseTo(0, 3);
  });

  it('takes a step forwards at once and tells it once', () => {
    const { at, go, apart } = machine();
    go(10);
    at.wall += 3600;
    expect(go(100)).toEqual([{ seconds: expect.closeTo(3600, 2), taken: true }]);
    expect(apart()).toBeCloseTo(0, 3);
  });

  it('never goes back: a step back is told once, and time goes on', () => {
    const { at, clock, go } = machine();
    go(10);
    at.wall -= 120;
    let before = clock.now().server;
    const told = [];
    for (let s = 0; s < 5000; s++) {
      told.push(...go(1));
      const after = clock.now().server;
      expect(after).toBeGreaterThan(before + 0.999);
      before = after;
    }
    expect(told).toEqual([{ seconds: expect.closeTo(-120, 2), taken: false }]);
    at.wall -= 60;
    expect(go(3)).toEqual([{ seconds: expect.closeTo(-177.5, 0), taken: false }]);
    at.wall += 300;
    expect(go(3)).toEqual([{ seconds: expect.closeTo(122.5, 0), taken: true }]);
  });
});

const UNIX = 1_800_000_000;

/** A channel "c" that sends a sample a second whose times are off, seen by a server. */
function channel(tolerance = 5) {
  const channels = createChannels();
  channels.describe({ channel: 'c', unit: '', label: '', interval: 1, low: null, high: null });
  const news = createChannelClocks(tolerance);
  const told: string[] = [];
  let second = 0;
  const send = (count: number, time: (now: number) => number, step = 0) => {
    for (let n = 0; n < count; n++) {
      second++;
      const moment = { server: UNIX + second + step, monotonic: second };
      channels.take(
        {
          channel: 'c',
          run: '',
          seq: -1,
          digest: 0,
          t0: time(moment.server),
          dt: 1,
          times: null,
          values: Float64Array.of(1),
        },
        moment,
      );
      told.push(
        ...news(channels, moment).map(
          ({ wrong, offset }) => `${wrong ? 'wrong' : 'right'} ${Math.round(offset)}`,
        ),
      );
    }
  };
  return { channels, send, told, second: () => second };
}

describe('the clocks of channels', () => {
  it('are said to be wrong once when they are ahead, and right again once they agree', () => {
    const { send, told } = channel();
    send(30, (now) => now + 12);
    expect(told).toEqual(['wrong -12']);
    send(60, (now) => now - 0.2);
    expect(told).toEqual(['wrong -12', 'right 0']);
  });

  it('are said to be wrong when they stay behind', () => {
    const { send, told } = channel();
    send(30, (now) => now - 40);
    expect(told).toEqual(['wrong 40']);
  });

  it('are not while what was held up is sent after', () => {
    const { send, told } = channel();
    let late = 300;
    send(200, (now) => now - Math.max(0, (late -= 5)));
    expect(told).toEqual([]);
  });

  it('are nobody’s for elapsed time, or for a recording of another year that is played', () => {
    for (const time of [(now: number) => now - UNIX, (now: number) => now - 4e7]) {
      const { send, told } = channel();
      send(60, time);
      expect(told).toEqual([]);
    }
  });

  it('go on as they were when the server’s own is set forwards', () => {
    const { channels, send, told, second } = channel();
    send(30, (now) => now - 0.5);
    const before = channels.time('c', UNIX + second())!;
    channels.serverStepped(3600);
    expect(channels.time('c', UNIX + second() + 3600)).toBeCloseTo(before, 9);
    // a producer whose machine was set along with this one
    send(30, (now) => now - 0.5, 3600);
    expect(told).toEqual([]);
    expect(channels.leastOffset('c')).toBeCloseTo(0.5, 9);
  });
});
