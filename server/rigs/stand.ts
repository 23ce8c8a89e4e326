import type { ChannelDescription } from '../../shared-types/channel.ts';
import { createDisturbance, type Disturbance } from './disturb.ts';
import { loopSlope, REVERSING_LOOP } from './loop.ts';
import { LORENZ_1963, lorenzSlope } from './lorenz.ts';
import { createRandom } from './random.ts';
import { createStepper, type Slope, stepInto } from './rungeKutta.ts';

/** Seconds between the samples of either loop. */
export const STAND_INTERVAL = 0.4;

/** Integration steps between samples. */
const STEPS = 20;

/** How one loop of the stand is made. */
export interface LoopDesign {
  channel: string;
  label: string;
  slope: Slope;
  /** where a trajectory starts, before a random push */
  start: readonly [number, number, number];
  /** index of the unknown that the thermocouples see */
  seen: number;
  /** kelvin for one dimensionless unit of temperature difference */
  kelvin: number;
  /** seconds for one dimensionless unit of time */
  seconds: number;
  disturbance: Disturbance;
}

/**
 * The two loops of the invented stand. Both see y, the temperature difference between the rising and the falling leg.
 * The scales of temperature and time are chosen, not measured: an orbit takes about 15 s and the flow reverses every
 * half minute or so.
 */
export const STAND_LOOPS: readonly LoopDesign[] = [
  {
    channel: 'Loop A',
    label: 'ΔT, right − left leg (simulated)',
    slope: loopSlope(REVERSING_LOOP),
    start: [1, 1, 20],
    seen: 1,
    kelvin: 0.5,
    seconds: 13.5,
    disturbance: { noise: 0.03, drift: 0.05, driftSeconds: 1800, dropped: 0.003, jitter: 0.006 },
  },
  {
    channel: 'Loop B',
    label: 'ΔT, right − left leg (simulated)',
    slope: lorenzSlope(LORENZ_1963),
    start: [1, 1, 25],
    seen: 1,
    kelvin: 0.3,
    seconds: 20,
    disturbance: { noise: 0.03, drift: 0.05, driftSeconds: 1800, dropped: 0.003, jitter: 0.006 },
  },
];

/** Samples of one loop, in time order; seconds since the stand was started, kelvin. Dropped samples are not there. */
export interface StandFrame {
  channel: string;
  times: Float64Array;
  values: Float64Array;
}

/** A running stand. */
export interface Stand {
  channels: ChannelDescription[];
  /** the samples up to and including this time, those already given left out; a channel without any is left out */
  advance(untilSeconds: number): StandFrame[];
}

/**
 * Starts the invented stand: natural-circulation water loops with thermocouple noise, a slow drift, dropped samples
 * and uneven sampling times. The same seed gives the same samples, however the time is cut into calls.
 */
export function createStand(seed: number | string, designs: readonly LoopDesign[] = STAND_LOOPS): Stand {
  const loops = designs.map((design) => ({ design, next: createLoop(design, `${seed} ${design.channel}`) }));
  const queued = loops.map(() => ({ time: Number.NEGATIVE_INFINITY, value: Number.NaN }));
  return {
    channels: designs.map(({ channel, label }) => ({
      channel,
      label,
      unit: 'K',
      interval: STAND_INTERVAL,
      low: -40,
      high: 40,
    })),
    advance(untilSeconds) {
      return loops.flatMap(({ design, next }, k) => {
        const times: number[] = [];
        const values: number[] = [];
        const sample = queued[k]!;
        for (;;) {
          if (sample.time === Number.NEGATIVE_INFINITY) next(sample);
          if (sample.time > untilSeconds) break;
          if (!Number.isNaN(sample.value)) {
            times.push(sample.time);
            values.push(sample.value);
          }
          sample.time = Number.NEGATIVE_INFINITY;
        }
        const frame = {
          channel: design.channel,
          times: Float64Array.from(times),
          values: Float64Array.from(values),
        };
        return times.length === 0 ? [] : [frame];
      });
    },
  };
}

/** Gives a loop's samples one by one, after the trajectory has had time to settle on the attractor. */
function createLoop(design: LoopDesign, seed: string): (out: { time: number; value: number }) => void {
  const random = createRandom(seed);
  const stepper = createStepper(design.slope, 3);
  const state = Float64Array.from(design.start, (value) => value + random.gaussian());
  const step = STAND_INTERVAL / design.seconds / STEPS;
  for (let i = 0; i < 50 / step; i++) stepInto(stepper, state, step);
  const disturb = createDisturbance(design.disturbance, STAND_INTERVAL, random);
  let index = 0;
  return (out) => {
    for (let i = 0; i < STEPS; i++) stepInto(stepper, state, step);
    disturb(STAND_INTERVAL * index++, design.kelvin * state[design.seen]!, out);
  };
}
