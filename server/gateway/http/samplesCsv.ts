import type { Store } from '../../store/store.ts';

/** about so many samples are read at a time */
const SAMPLES_A_PART = 50_000;

const cell = (name: string): string => (/[",\n]/.test(name) ? `"${name.replaceAll('"', '""')}"` : name);

/**
 * The samples of a channel with from ≤ t ≤ to as CSV, in parts: a header, then a line a sample, an empty cell where
 * there was no value. However long the range, only a part of it is in memory.
 *
 * @param interval seconds between samples, null when unknown
 */
export async function* samplesAsCsv(
  store: Pick<Store, 'samplesBetween'>,
  channel: string,
  from: number,
  to: number,
  interval: number | null,
): AsyncGenerator<string> {
  yield `time,${cell(channel)}\n`;
  const span = SAMPLES_A_PART * (interval ?? (to - from) / SAMPLES_A_PART);
  let written = Number.NEGATIVE_INFINITY;
  for (let start = from; start <= to; start += span) {
    const { times, values } = await store.samplesBetween(channel, start, Math.min(to, start + span));
    let part = '';
    for (let i = 0; i < times.length; i++) {
      // Both ends of a part count: the sample on the border comes twice.
      if (times[i]! <= written) continue;
      part += `${times[i]},${Number.isNaN(values[i]!) ? '' : values[i]}\n`;
      written = times[i]!;
    }
    if (part !== '') yield part;
    if (!(span > 0)) return;
  }
}
