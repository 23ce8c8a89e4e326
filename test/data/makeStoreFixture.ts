// Made store-version-1.db.gz: Foreshift 0.1.0 on Node 20.20, schema version 1, makeStoreFixture(an empty folder, the file), 2026-12-01.
// Made store-version-2.db.gz: the same with schema version 2, 2026-12-01.
// Made store-version-3.db.gz: the same with schema version 3 and a message that waits for its receiver, 2026-12-01.
import { readFileSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { gzipSync } from 'node:zlib';
import Database from 'better-sqlite3';
import { openStore } from '../../server/store/openStore.ts';

/** Writes the fixture of the current schema version: 25 frames of 100 samples, a watch, a warning, what is left out, a rehearsal, a message to a receiver. */
export async function makeStoreFixture(folder: string, out: string): Promise<void> {
  const store = openStore(folder, { commitEvery: 0.01 });
  await store.saveChannel({ channel: 'A', unit: 'K', label: '', interval: 0.5, low: null, high: null });
  for (let seq = 0; seq < 25; seq++)
    await store.appendFrames([
      {
        channel: 'A',
        run: 'run 1',
        seq,
        digest: seq * 3,
        t0: 1e9 + seq * 50,
        dt: 0.5,
        times: null,
        values: Float64Array.from({ length: 100 }, (_, i) => (seq * 100 + i === 1300 ? Number.NaN : ((seq * 100 + i) % 97) / 8)),
      },
    ]);
  await store.saveWatch({ watch: 'w', settings: '{"name":"loop"}', snapshot: Uint8Array.of(1, 2, 3) });
  await store.saveWarning({
    id: 0, watch: 'w', model: 'm', channels: ['A'], at: 1e9 + 0.1, from: 1e9 + 10.1, to: 1e9 + 20.1, madeAt: 1e9 + 0.2,
    deliveredAt: null, variable: 'forcing', value: 2.5, threshold: 2, outcome: 'open', switchAt: null, lead: null,
    acknowledgedAt: null, acknowledgedBy: null, quiet: false,
  });
  await store.saveMark({ id: 0, channel: 'A', from: 1e9 + 5, to: null, why: 'calibration', text: 'new zero', by: 'me' });
  await store.saveCondition({ id: 0, channel: 'A', when: 'B', side: 'above', level: 2.5 });
  await store.saveRehearsal({ id: '1', state: '{"state":"done"}', result: Uint8Array.of(4, 5, 6) });
  await store.saveDelivery({
    id: 0, receiver: 'lamp', kind: 'issued', event: 'w/1000000000.1/issued', watch: 'w', warning: 1, madeAt: 1e9 + 0.2,
    state: 'pending', attempts: 0, settledAt: null, text: '', body: '{"specversion":"1.0"}', until: 1e9 + 20,
  });
  await store.close();
  const database = new Database(join(folder, 'foreshift.db'));
  database.pragma('journal_mode = DELETE');
  database.close();
  writeFileSync(out, gzipSync(readFileSync(join(folder, 'foreshift.db')), { level: 9 }));
}
