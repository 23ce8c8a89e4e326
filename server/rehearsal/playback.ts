import type { Frame } from '../watch/types.ts';

/** One recorded channel: times strictly increasing, seconds; NaN where there was no value. */
export interface RecordedSeries {
  channel: string;
  times: Float64Array;
  values: Float64Array;
}

/**
 * A recording as the frames of a live stream: the channels take turns, each as far as the first one has come.
 *
 * @param series  of one recording; the channel with most samples leads
 * @param samples of the leading channel in a frame
 */
export function* framesOf(series: readonly RecordedSeries[], samples = 1000): Generator<Frame> {
  const order = [...series].sort((a, b) => b.times.length - a.times.length);
  const sent = order.map(() => 0);
  const leader = order[0];
  if (leader === undefined) return;
  while (sent.some((count, k) => count < order[k]!.times.length)) {
    const reach = Math.min(leader.times.length, sent[0]! + samples);
    const until = reach === leader.times.length ? Number.POSITIVE_INFINITY : leader.times[reach - 1]!;
    for (let k = 0; k < order.length; k++) {
      const { channel, times, values } = order[k]!;
      const from = sent[k]!;
      let to = from;
      while (to < times.length && times[to]! <= until) to++;
      if (to === from) continue;
      sent[k] = to;
      yield {
        channel,
        t0: times[from]!,
        dt: 0,
        times: times.subarray(from, to),
        values: values.subarray(from, to),
      };
    }
  }
}
