import type { Database } from 'better-sqlite3';
import type { MeasuredDelay } from '../../shared-types/delivery.ts';
import type { DeliveryQuery, StoredDelivery } from './store.ts';

/** What receivers are sent, and the measured delays; each as the method of the same name of `Store`. */
export interface Outbox {
  saveDelivery(delivery: StoredDelivery): number | null;
  deliveries(query: DeliveryQuery): StoredDelivery[];
  pendingDeliveries(): StoredDelivery[];
  saveDelay(delay: MeasuredDelay): void;
  delay(watch: string): MeasuredDelay | null;
}

/** The outbox over an open, migrated database; the caller holds the transaction. */
export function createOutbox(database: Database): Outbox {
  const add = database.prepare(
    `INSERT INTO outbox (receiver, event, warning, pending, json) VALUES (?, ?, ?, ?, ?)
     ON CONFLICT (receiver, event) DO NOTHING`,
  );
  const put = database.prepare('UPDATE outbox SET pending = ?, json = ? WHERE id = ?');
  const select = (order: 'ASC' | 'DESC') =>
    database.prepare(
      `SELECT id, json FROM outbox
       WHERE id > @after AND (@warning IS NULL OR warning = @warning)
         AND (@receiver IS NULL OR receiver = @receiver)
       ORDER BY id ${order} LIMIT @most`,
    );
  const [oldestFirst, newestFirst] = [select('ASC'), select('DESC')];
  const pendingOnes = database.prepare('SELECT id, json FROM outbox WHERE pending = 1 ORDER BY id');
  const putDelay = database.prepare(
    'INSERT INTO delays (watch, json) VALUES (?, ?) ON CONFLICT (watch) DO UPDATE SET json = excluded.json',
  );
  const getDelay = database.prepare('SELECT json FROM delays WHERE watch = ?').pluck();
  const read = ({ id, json }: { id: number; json: string }) => ({
    ...(JSON.parse(json) as StoredDelivery),
    id,
  });
  return {
    saveDelivery: (delivery) => {
      const pending = delivery.state === 'pending' ? 1 : 0;
      // what is settled is never sent again
      const json = JSON.stringify(pending === 1 ? delivery : { ...delivery, body: '' });
      if (delivery.id !== 0) {
        put.run(pending, json, delivery.id);
        return delivery.id;
      }
      const { changes, lastInsertRowid } = add.run(
        delivery.receiver,
        delivery.event,
        delivery.warning,
        pending,
        json,
      );
      return changes === 0 ? null : Number(lastInsertRowid);
    },
    deliveries: ({ after, warning, receiver, most, newest }) => {
      const rows = (newest === true ? newestFirst : oldestFirst).all({
        after: after ?? -1,
        warning: warning ?? null,
        receiver: receiver ?? null,
        most: most ?? -1,
      }) as { id: number; json: string }[];
      const found = rows.map(read);
      return newest === true ? found.reverse() : found;
    },
    pendingDeliveries: () => (pendingOnes.all() as { id: number; json: string }[]).map(read),
    saveDelay: (delay) => {
      putDelay.run(delay.watch, JSON.stringify(delay));
    },
    delay: (watch) => {
      const json = getDelay.get(watch) as string | undefined;
      return json === undefined ? null : (JSON.parse(json) as MeasuredDelay);
    },
  };
}
