import type { Moment } from './channels.ts';

/** The machine's clocks, seconds: Unix time, which somebody may set, and one that never steps. */
export interface ClockSources {
  wall(): number;
  monotonic(): number;
}

/** The machine's clock was set: by so many seconds, forwards if positive; whether the server's own time went along. */
export interface ClockStep {
  seconds: number;
  taken: boolean;
}

export interface ServerClock {
  now(): Moment;
  /** compares with the machine's clock, once a second or so; tells of each step once */
  check(): ClockStep | null;
}

/** What differs by more was set, not slewed. */
const STEP_SECONDS = 1;
/** A clock under NTP is slewed no faster than this (RFC 5905, A.1.1: MAXFREQ, 500 ppm). */
const FOLLOWING = 500e-6;

export const machineClock: ClockSources = {
  wall: () => Date.now() / 1000,
  monotonic: () => performance.now() / 1000,
};

/**
 * The server's time: Unix seconds that go with the monotonic clock, so that no age or span ever steps back.
 *
 * Small differences to the machine's clock are followed gently. One that is set forwards (by NTP after a start with a
 * wrong time, or after the machine slept) is followed at once. One that is set back is not: times already given out
 * would come again; it is told, and followed gently until a restart takes the new time.
 */
export function createServerClock(sources: ClockSources): ServerClock {
  let offset = sources.wall() - sources.monotonic();
  let checkedAt = sources.monotonic();
  /** of a step back, so that it is told once */
  let told = 0;
  return {
    now() {
      const monotonic = sources.monotonic();
      return { server: offset + monotonic, monotonic };
    },
    check() {
      const monotonic = sources.monotonic();
      const apart = sources.wall() - (offset + monotonic);
      const most = FOLLOWING * (monotonic - checkedAt);
      checkedAt = monotonic;
      if (apart > STEP_SECONDS) {
        offset += apart;
        told = 0;
        return { seconds: apart, taken: true };
      }
      offset += Math.max(-most, Math.min(most, apart));
      if (apart > -STEP_SECONDS) told = 0;
      else if (Math.abs(apart - told) > STEP_SECONDS) {
        // going along gently brings it nearer: only what is further away than what was told is a new step
        const further = apart < told;
        told = apart;
        if (further) return { seconds: apart, taken: false };
      }
      return null;
    },
  };
}

/** A step in words, with what to do. */
export function stepText({ seconds, taken }: ClockStep): string {
  const by = `${Math.abs(seconds).toFixed(1)} s`;
  return taken
    ? `the machine's clock was set forwards by ${by}, or the machine slept; the server's time went along`
    : `the machine's clock was set back by ${by}; the server keeps its own time, so that none comes twice; restart it to take the new one`;
}
