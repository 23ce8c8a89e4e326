import { readRecording } from '../recordings/readRecording.ts';
import { createStand } from '../rigs/stand.ts';
import { createProducer } from './producer.ts';

/** The past ends so many seconds before now: the rig begins a little earlier than that, so that nothing is missing. */
const ENDS_BEFORE_SECONDS = 170;
const FRAME_SAMPLES = 1000;

/**
 * Sends the demo's training recordings as the loops' past, so that the Rehearse page and `stored:NAME` have something
 * to work on from the first minute. Before any watch is there: nobody is warned of the past.
 *
 * @param to         ws://HOST:PORT/ingest
 * @param recordings CSV files of the loops, elapsed seconds
 * @param now        Unix seconds
 * @returns once all of it is on disk
 */
export async function sendDemoPast(
  to: string,
  recordings: readonly string[],
  now: number,
  token: string | null = null,
): Promise<void> {
  if (recordings.length === 0) return;
  const producer = createProducer({ to, token, run: 'demo past', channels: createStand('past').channels });
  for (const file of recordings) {
    const { channels } = await readRecording(file, {});
    for (const { channel, times, values } of channels) {
      const shift = now - ENDS_BEFORE_SECONDS - times.at(-1)!;
      const t = times.map((time) => time + shift);
      for (let from = 0; from < t.length; from += FRAME_SAMPLES) {
        const to = from + FRAME_SAMPLES;
        producer.send(channel, { t: t.slice(from, to), values: values.slice(from, to) });
      }
    }
  }
  await producer.idle();
  await producer.close();
}
