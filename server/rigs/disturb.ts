import type { Random } from './random.ts';

/** What a measuring chain does to clean values; lengths of time in seconds, sizes in the channel's unit. */
export interface Disturbance {
  /** standard deviation of the sensor's noise, independent from sample to sample */
  noise: number;
  /** standard deviation of the slow drift and the time over which it forgets */
  drift: number;
  driftSeconds: number;
  /** share of samples that never arrive */
  dropped: number;
  /** standard deviation of the sampling times about the even ones; cut at three of them */
  jitter: number;
}

/** A disturbed sample; value NaN: it never arrived. */
export interface DisturbedSample {
  time: number;
  value: number;
}

/**
 * A measuring chain for evenly sampled values. It draws the same number of random numbers for every sample, so that
 * what it does to one does not depend on what became of those before. The drift is an Ornstein–Uhlenbeck process,
 * updated exactly.
 *
 * @param interval seconds between samples
 * @param out      overwritten by every call of the function returned
 * @see Gillespie 1996, Physical Review E 54, p. 2084 (the exact update)
 */
export function createDisturbance(
  disturbance: Disturbance,
  interval: number,
  random: Random,
): (time: number, value: number, out: DisturbedSample) => void {
  const { noise, drift, driftSeconds, dropped, jitter } = disturbance;
  const kept = Math.exp(-interval / driftSeconds);
  const kick = drift * Math.sqrt(1 - kept * kept);
  let offset = drift * random.gaussian();
  return (time, value, out) => {
    offset = kept * offset + kick * random.gaussian();
    const late = Math.max(-3, Math.min(3, random.gaussian())) * jitter;
    const reading = value + offset + noise * random.gaussian();
    out.time = time + late;
    out.value = random.uniform() < dropped ? Number.NaN : reading;
  };
}
