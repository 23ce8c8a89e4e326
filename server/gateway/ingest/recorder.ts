import type { FrameToStore, Store } from '../../store/store.ts';
import type { Settled } from './ingestSession.ts';

export interface Recorder {
  /** queues a frame for the disk; `settled` is called once it is there, or with a sentence if it cannot be */
  append(frame: FrameToStore, settled: Settled): void;
  /** gives a frame number up, after what was queued before */
  skip(channel: string, run: string, seq: number, digest: number, settled: Settled): void;
  /** hands everything queued to the store: what is asked of the store next comes after it */
  flush(): void;
  /** samples taken and not yet on disk */
  waiting(): number;
  /** resolves once everything handed over is settled */
  idle(): Promise<void>;
}

/** Beyond this many samples waiting for the disk, new frames are watched but not recorded. */
const MOST_WAITING_SAMPLES = 20_000_000;

/**
 * Gathers the frames of all connections into one append a turn of the event loop.
 *
 * @param onTrouble called after every write: with a sentence when the store could not, else with null
 */
export function createRecorder(store: Store, onTrouble: (text: string | null) => void): Recorder {
  let queue: { frame: FrameToStore; settled: Settled }[] = [];
  let scheduled = false;
  let waitingSamples = 0;
  const handedOver = new Set<Promise<void>>();

  const track = (written: Promise<void>, settled: Settled[], samples: number) => {
    const done = written.then(
      () => {
        onTrouble(null);
        for (const each of settled) each(null);
      },
      (error: Error) => {
        const text = `what arrives is not being recorded: ${error.message}`;
        onTrouble(text);
        for (const each of settled) each(text);
      },
    );
    const counted = done.finally(() => {
      waitingSamples -= samples;
      handedOver.delete(counted);
    });
    handedOver.add(counted);
  };
  const flush = () => {
    scheduled = false;
    if (queue.length === 0) return;
    const batch = queue;
    queue = [];
    const samples = batch.reduce((sum, { frame }) => sum + frame.values.length, 0);
    track(
      store.appendFrames(batch.map(({ frame }) => frame)),
      batch.map(({ settled }) => settled),
      samples,
    );
  };
  return {
    append(frame, settled) {
      if (waitingSamples > MOST_WAITING_SAMPLES)
        return settled(`${waitingSamples} samples wait for the disk; send more slowly, or use a faster disk`);
      waitingSamples += frame.values.length;
      queue.push({ frame, settled });
      if (scheduled) return;
      scheduled = true;
      setImmediate(flush);
    },
    skip(channel, run, seq, digest, settled) {
      flush();
      track(store.skipFrame(channel, run, seq, digest), [settled], 0);
    },
    flush,
    waiting: () => waitingSamples,
    async idle() {
      flush();
      while (handedOver.size > 0) await Promise.all(handedOver);
    },
  };
}
