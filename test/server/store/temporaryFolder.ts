import { mkdtempSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterEach } from 'vitest';
import type { FrameToStore } from '../../../server/store/store.ts';

const made: string[] = [];
afterEach(() => {
  for (const folder of made.splice(0)) rmSync(folder, { recursive: true, force: true });
});

/** An empty folder, removed after the test. */
export function temporaryFolder(): string {
  const folder = mkdtempSync(join(tmpdir(), 'foreshift-test-'));
  made.push(folder);
  return folder;
}

/** A frame of channel "A" as the gateway would hand it over; regular unless `times` is given. */
export function frame(
  seq: number,
  t0: number,
  values: ArrayLike<number>,
  rest: Partial<FrameToStore> = {},
): FrameToStore {
  return {
    channel: 'A',
    run: 'run 1',
    seq,
    digest: (seq * 2654435761) >>> 0,
    t0,
    dt: 0.01,
    times: null,
    values: Float64Array.from(values),
    ...rest,
  };
}
