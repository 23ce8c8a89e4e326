import { InputError } from '../signal/inputError.ts';
import { parseTime } from '../signal/time.ts';
import type { RecordedChannel, Recording } from './recording.ts';

/** What a user may say for the ends of a range: seconds from the recording's first sample, or RFC 3339. */
export type RangeEnd = string | number | undefined;

/**
 * The part of a recording with from ≤ t ≤ to; an end left out is the recording's own. The samples are views, not copies.
 *
 * @throws InputError BAD_TIME where an end cannot be read, EMPTY_RANGE where nothing lies between them
 */
export function cutRange(recording: Recording, from: RangeEnd, to: RangeEnd): Recording {
  if (from === undefined && to === undefined) return recording;
  const first = Math.min(...recording.channels.map(({ times }) => times[0] ?? Number.POSITIVE_INFINITY));
  const last = Math.max(...recording.channels.map(({ times }) => times.at(-1) ?? Number.NEGATIVE_INFINITY));
  const start = from === undefined ? first : endOf(from, '--from', first);
  const end = to === undefined ? last : endOf(to, '--to', first);
  const channels = recording.channels.map((channel) => cutChannel(channel, start, end));
  if (channels.every(({ times }) => times.length === 0))
    throw new InputError(
      'EMPTY_RANGE',
      `nothing of ${recording.name} lies from ${from ?? 'its start'} to ${to ?? 'its end'}; it holds ` +
        `0 to ${+(last - first).toPrecision(12)} s from its first sample (${first} to ${last} in its own time); ` +
        'choose --from below --to within that',
    );
  return { ...recording, channels };
}

function endOf(end: string | number, option: string, first: number): number {
  const seconds = typeof end === 'number' ? end : end.trim() === '' ? Number.NaN : Number(end);
  if (Number.isFinite(seconds)) return first + seconds;
  try {
    return parseTime(String(end));
  } catch {
    throw new InputError(
      'BAD_TIME',
      `${option} "${end}" is not a time; expected seconds from the first sample or RFC 3339; ` +
        `write ${option} 12.5 or ${option} 2024-05-17T09:30:00Z`,
    );
  }
}

function cutChannel(channel: RecordedChannel, start: number, end: number): RecordedChannel {
  const from = countWhile(channel.times, (t) => t < start);
  const to = Math.max(
    from,
    countWhile(channel.times, (t) => t <= end),
  );
  return { ...channel, times: channel.times.subarray(from, to), values: channel.values.subarray(from, to) };
}

function countWhile(times: Float64Array, holds: (t: number) => boolean): number {
  let low = 0;
  let high = times.length;
  while (low < high) {
    const middle = (low + high) >> 1;
    if (holds(times[middle]!)) low = middle + 1;
    else high = middle;
  }
  return low;
}
