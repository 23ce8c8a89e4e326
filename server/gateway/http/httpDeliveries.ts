import type express from 'express';
import { type Delivery, NewTrial } from '../../../shared-types/delivery.ts';
import type { StoredDelivery } from '../../store/store.ts';
import type { Hub } from '../hub.ts';
import { numberIn, read, text } from './httpAnswers.ts';

const MOST_ENTRIES = 10_000;

/** As it is shown: without what was sent. */
const shown = ({ body: _, until: __, ...delivery }: StoredDelivery): Delivery => delivery;

/** What receivers were sent, and what became of it; trials by which the delay is measured. */
export function routeDeliveries(app: express.Express, hub: Hub): void {
  app.get('/api/deliveries', async ({ query }, response) => {
    const receiver = text(query.receiver);
    const found = await hub.store.deliveries({
      ...(receiver ? { receiver } : {}),
      ...(text(query.warning) ? { warning: numberIn(query, 'warning', 0) } : {}),
      ...(text(query.after) === undefined ? { newest: true } : { after: numberIn(query, 'after', 0) }),
      most: Math.min(MOST_ENTRIES, Math.max(1, numberIn(query, 'most', 1000))),
    });
    response.json(found.map(shown));
  });
  // null: none was measured yet
  app.get('/api/watches/:watch/delay', async ({ params }, response) => {
    response.json(await hub.store.delay(hub.watches.state(params.watch).watch));
  });
  app.post('/api/watches/:watch/trials', async ({ params, body }, response) => {
    response.json(await hub.trials.run(params.watch, read(NewTrial, body).by));
  });
}
