import type { Steps } from '../../watch/types.ts';

/** A watch's variable on its way to the store: grows, and is emptied once a second. */
export interface TraceBuffer {
  add(steps: Steps): void;
  /** what was gathered since the last time; null: nothing */
  empty(): { times: Float64Array; values: Float64Array } | null;
}

/** Creates an empty one. */
export function createTraceBuffer(): TraceBuffer {
  let times = new Float64Array(1024);
  let values = new Float64Array(1024);
  let count = 0;
  return {
    add(steps) {
      if (count + steps.count > times.length) {
        const length = Math.max(2 * times.length, count + steps.count);
        const [longerTimes, longerValues] = [new Float64Array(length), new Float64Array(length)];
        longerTimes.set(times.subarray(0, count));
        longerValues.set(values.subarray(0, count));
        times = longerTimes;
        values = longerValues;
      }
      times.set(steps.time.subarray(0, steps.count), count);
      values.set(steps.value.subarray(0, steps.count), count);
      count += steps.count;
    },
    empty() {
      const trace = count === 0 ? null : { times: times.slice(0, count), values: values.slice(0, count) };
      count = 0;
      return trace;
    },
  };
}
