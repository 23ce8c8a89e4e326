// Appends numbered frames to the store of the folder in argv[2] until it is killed; prints the seq of every durable one.
import { createStoreThread } from '../../dist/server/store/storeThread.js';

const store = await createStoreThread(process.argv[2], { commitEvery: 0.01 });
let { next } = await store.run('A', 'r');
process.stdout.write(`open ${next}\n`);
await store.saveWatch({ watch: 'w', settings: '{}', snapshot: null });

const appendOne = async () => {
  const seq = next++;
  const values = Float64Array.from({ length: 100 }, (_, i) => seq * 100 + i);
  const frame = { channel: 'A', run: 'r', seq, digest: seq, t0: seq, dt: 0.01, times: null, values };
  const trace = { times: Float64Array.of(seq), values: Float64Array.of(seq) };
  await Promise.all([
    store.appendFrames([frame]),
    store.saveProgress([{ watch: 'w', snapshot: Uint8Array.of(seq & 255), trace }]),
  ]);
  process.stdout.write(`${seq}\n`);
};
// a few at a time, so that a kill always meets frames under way
for (;;) {
  const started = [appendOne(), appendOne(), appendOne(), appendOne()];
  await new Promise((resolve) => setTimeout(resolve, 1));
  if (next % 40 === 0) await Promise.all(started);
}
