import { type RehearsalResult, SWITCH_OUTCOMES, type SwitchCard } from '../../../shared-types/rehearsal.ts';
import { modelFromJson } from '../../model/modelFile.ts';
import { cardOf, cardRange, catchingOfTable } from '../../rehearsal/card.ts';
import { leaveOut } from '../../signal/leaveOut.ts';
import type { StoreReader } from '../../store/store.ts';
import { firstCover } from '../../watch/grading.ts';
import { toSteps } from '../../watch/watchRule.ts';
import { Refused } from '../refused.ts';

/**
 * The card of a rehearsed switch, from the stored samples around it.
 *
 * @param row of the operating table; null: the chosen one
 * @throws Refused 404 where there is no such switch or row
 */
export async function rehearsalCard(
  result: RehearsalResult,
  index: number,
  row: number | null,
  store: StoreReader,
): Promise<SwitchCard> {
  const { switches, table, request } = result;
  const event = switches[index];
  const point = table.rows[row ?? result.chosenRow];
  if (event === undefined || point === undefined) {
    const [what, given, count] =
      event === undefined ? ['switch', index, switches.length] : ['row', row, table.rows.length];
    throw new Refused(
      404,
      'NOT_THERE',
      `there is no ${what} ${given} in this rehearsal; it has ${count}, from 0`,
    );
  }
  const fitted = modelFromJson(result.model);
  const { threshold, rearm } = point;
  const model = { ...fitted, rule: { ...fitted.rule!, threshold, rearm } };
  const { from, to } = cardRange(model, event.at);
  const leftOut = result.leftOut.filter(({ recording }) => recording === event.recording);
  const series = await Promise.all(
    request.channels.map(async (channel) => {
      const { times, values } = await store.samplesBetween(channel, from, to);
      return { channel, times, values: leaveOut(times, values, leftOut) };
    }),
  );
  const warnedAt = warningOf(result, row ?? result.chosenRow, index);
  return cardOf({
    model,
    channels: request.channels,
    series,
    at: event.at,
    outcome: SWITCH_OUTCOMES[point.switches[index]!]!,
    warnedAt,
    lead: warnedAt === null ? null : event.at - warnedAt - request.delay,
    catching: catchingOfTable(table, index),
  });
}

/** When the first warning of a row that covers the switch was issued; null: none does. */
function warningOf(
  { table, switches, settings }: RehearsalResult,
  row: number,
  index: number,
): number | null {
  const { at, recording } = table.rows[row]!;
  const event = switches[index]!;
  const warnings = Array.from(at).filter((_, i) => recording[i] === event.recording);
  const { interval } = settings;
  const spans = {
    interval,
    leastLead: toSteps(settings.leastLead, interval),
    horizon: toSteps(settings.horizon, interval),
  };
  const first = firstCover(warnings, event.at, spans);
  return first === -1 ? null : warnings[first]!;
}
