import type { RehearsalResult } from '../../../shared-types/rehearsal.ts';
import { modelFromJson, modelToJson } from '../../model/modelFile.ts';
import { Refused } from '../refused.ts';
import type { Watches } from './watches.ts';

/** The rehearsed watch as it was put into use. */
export interface PutIntoUse {
  watch: string;
  model: string;
}

/**
 * Puts a row of a rehearsal's operating table into use: its model, with the row's threshold and score, is saved under a
 * name that is free, a watch with it begins on the rehearsed channels, and whatever watched these channels until now
 * is taken out of use.
 *
 * @param name of the model and its watch; null: made from channels and rule
 * @throws Refused 404 where there is no such row
 */
export async function putIntoUse(
  watches: Watches,
  result: RehearsalResult,
  row: number,
  name: string | null,
): Promise<PutIntoUse> {
  const point = result.table.rows[row];
  if (point === undefined)
    throw new Refused(
      404,
      'NOT_THERE',
      `there is no row ${row} in this rehearsal's table; it has ${result.table.rows.length}, counted from 0`,
    );
  const { channels } = result.request;
  const model = modelFromJson(result.model);
  const { threshold, rearm, score } = point;
  model.rule = { ...model.rule!, threshold, rearm };
  model.score = score;
  model.name = name ?? nameOf(result, threshold);
  const saved = await watches.addModel(modelToJson(model));
  const { watch } = await watches.replace({ name: saved.slice(0, 80), model: saved, channels });
  return { watch, model: saved };
}

function nameOf({ request, settings }: RehearsalResult, threshold: number): string {
  const side = settings.direction === 'falling' ? 'below' : 'above';
  const rule = `${settings.variable} ${side} ${Number(threshold.toPrecision(3))}`;
  return `${request.channels.join(' + ').slice(0, 40)}, ${rule}`;
}
