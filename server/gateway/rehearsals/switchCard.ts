import type { SwitchCard } from '../../../shared-types/rehearsal.ts';
import { cardOf, cardRange } from '../../rehearsal/card.ts';
import { conditionStretches, type LeftOut, leaveOut } from '../../signal/leaveOut.ts';
import type { Hub } from '../hub.ts';
import { Refused } from '../refused.ts';

/**
 * The card of a switch that a watch has met: from the stored samples around it, with the model the watch uses now.
 *
 * @throws Refused 404 for a switch that is not there, 409 where it has no card, saying why
 */
export async function switchCard(hub: Hub, id: number): Promise<SwitchCard> {
  const [event] = await hub.store.switches({ after: id - 1, most: 1 });
  if (event?.id !== id)
    throw new Refused(404, 'NO_SUCH_SWITCH', `there is no switch ${id}; GET /api/switches lists them`);
  if (!hub.watches.has(event.watch))
    throw new Refused(
      409,
      'NO_CARD',
      `the watch "${event.watch}" that met switch ${id} is not running; restart the server with its model`,
    );
  const { channels, model: name } = hub.watches.state(event.watch);
  const model = hub.watches.model(name);
  if (model?.rule == null)
    throw new Refused(
      409,
      'NO_CARD',
      `the model "${name}" has no watch rule, so nothing was watched before switch ${id}; rehearse it`,
    );
  hub.recorder.flush();
  const { from, to } = cardRange(model, event.at);
  const leftOut = await leftOutBetween(hub, channels, from, to);
  const series = await Promise.all(
    channels.map(async (channel) => {
      const { times, values } = await hub.store.samplesBetween(channel, from, to);
      return { channel, times, values: leaveOut(times, values, leftOut) };
    }),
  );
  const warning = event.warning === null ? null : await warningAt(hub, event.warning);
  const card = cardOf({
    model,
    channels,
    series,
    at: event.at,
    outcome: event.outcome,
    warnedAt: warning,
    lead: event.lead,
  });
  return { ...card, notKnown: whyCostUnknown(name, model.operating) };
}

/** What people said must not count is no sample to the watch, nor to its card. */
async function leftOutBetween(hub: Hub, channels: string[], from: number, to: number): Promise<LeftOut[]> {
  const { marks, conditions } = hub.leftOut.of(channels);
  const stretches = conditions.map(async (condition) => {
    // what holds at the start was decided by a sample before it
    const { times, values } = await hub.store.samplesBetween(condition.when, from - (to - from), to);
    return conditionStretches(times, values, condition);
  });
  return [...marks, ...(await Promise.all(stretches)).flat()];
}

async function warningAt(hub: Hub, id: number): Promise<number | null> {
  const [warning] = await hub.store.warnings({ after: id - 1, most: 1 });
  return warning?.id === id ? warning.at : null;
}

function whyCostUnknown(model: string, operating: readonly unknown[] | undefined): string | null {
  return operating === undefined || operating.length === 0
    ? `the model "${model}" carries no table of other thresholds; one that comes out of a rehearsal does`
    : null;
}
