import { z } from 'zod';
import { InputError } from '../../signal/inputError.ts';
import type { StoredWatch } from '../../store/store.ts';
import { SNAPSHOT_VERSION } from '../../watch/snapshot.ts';
import { complaint } from '../complaint.ts';
import { type Checkpoint, readCheckpoint, type WatchMemo } from './runningWatch.ts';

/** What a watch's stored settings must have; the alarm's own parts are left to it. */
const Memo = z.looseObject({
  watch: z.string().min(1),
  name: z.string(),
  model: z.string(),
  channels: z.array(z.string()).min(1),
  reaction: z.number(),
  use: z.enum(['in use', 'on trial', 'taken out of use']),
  alarm: z.looseObject({
    active: z.boolean(),
    setAside: z
      .looseObject({ kind: z.string(), reason: z.string(), until: z.number().optional() })
      .nullable(),
  }),
  gradeSince: z.number().nullable(),
});

const Ordinals = z.looseObject({
  snapshot: z.looseObject({ version: z.number() }),
  ordinals: z.record(z.string(), z.number().int().nonnegative()),
  offsets: z.record(z.string(), z.number().nullable()),
});

/**
 * The settings of a stored watch.
 *
 * @throws InputError WATCH_DAMAGED when they are not those of a watch
 */
export function memoOf({ watch, settings }: StoredWatch): WatchMemo {
  const parsed = Memo.safeParse(parseJson(settings));
  if (parsed.success && parsed.data.watch === watch) return parsed.data as unknown as WatchMemo;
  const found = parsed.success ? `they are of "${parsed.data.watch}"` : complaint(parsed.error);
  throw new InputError(
    'WATCH_DAMAGED',
    `its settings are damaged (${found}); begin a new watch with its model`,
  );
}

/**
 * What a stored watch remembers; null when nothing was stored yet.
 *
 * @throws InputError SNAPSHOT_NEWER of a newer program, SNAPSHOT_DAMAGED when it cannot be read
 */
export function checkpointOf({ snapshot }: StoredWatch): Checkpoint | null {
  if (snapshot === null) return null;
  let decoded: unknown;
  try {
    decoded = readCheckpoint(snapshot);
  } catch (error) {
    throw damaged((error as Error).message);
  }
  const parsed = Ordinals.safeParse(decoded);
  if (!parsed.success) throw damaged(complaint(parsed.error));
  const { version } = parsed.data.snapshot;
  if (version > SNAPSHOT_VERSION)
    throw new InputError(
      'SNAPSHOT_NEWER',
      `its snapshot has version ${version}, this program reads up to ${SNAPSHOT_VERSION}; use the newer program`,
    );
  return decoded as Checkpoint;
}

const damaged = (found: string) =>
  new InputError('SNAPSHOT_DAMAGED', `its snapshot is damaged (${found}); the watch begins anew`);

function parseJson(text: string): unknown {
  try {
    return JSON.parse(text);
  } catch {
    return null;
  }
}
