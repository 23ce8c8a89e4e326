import type { RehearsalResult } from '../../shared-types/rehearsal.ts';
import { send, startWatch } from '../requests.ts';
import * as requests from './requests.ts';

/** Seconds to wait until a played channel is known to the server. */
const PATIENCE = 10;

/** The model of a rehearsal with another row's threshold, under a name of its own. */
export function modelOfRow(
  { model, table }: Pick<RehearsalResult, 'model' | 'table'>,
  row: number,
  name: string,
): unknown {
  const { threshold, rearm, score } = table.rows[row]!;
  const parsed = JSON.parse(model) as { rule: object };
  return { ...parsed, name, rule: { ...parsed.rule, threshold, rearm }, score };
}

/**
 * Watches a played channel with a row of a rehearsal, once the server knows the channel.
 *
 * @throws Error with the server's own sentence
 */
export async function playWatched(result: RehearsalResult, row: number, as: string[]): Promise<void> {
  for (let waited = 0; ; waited += 0.25) {
    const known = await requests.channels();
    if (as.every((name) => known.some(({ channel }) => channel === name))) break;
    if (waited >= PATIENCE)
      throw new Error(
        `“${as.join(', ')}” has not arrived after ${PATIENCE} s, so nothing watches it; see the Logbook.`,
      );
    await new Promise((resolve) => setTimeout(resolve, 250));
  }
  const { name } = (await send('/api/models', modelOfRow(result, row, as[0]!))) as { name: string };
  await startWatch({ name: as[0]!.slice(0, 80), model: name, channels: as });
}
