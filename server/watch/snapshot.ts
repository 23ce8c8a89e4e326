import type { WatchSnapshot } from './types.ts';

/** Version of a watch's snapshot that this program writes; older ones are brought forward, newer ones refused. */
export const SNAPSHOT_VERSION = 1;

/** A deep copy of plain data and typed arrays: what a watch remembers must not change under a snapshot. */
export function copyOf(value: unknown): unknown {
  if (value instanceof Float64Array) return value.slice();
  if (value instanceof Uint8Array) return value.slice();
  if (Array.isArray(value)) return value.map(copyOf);
  if (value === null || typeof value !== 'object') return value;
  const copy: Record<string, unknown> = {};
  for (const [key, part] of Object.entries(value)) copy[key] = copyOf(part);
  return copy;
}

/**
 * @throws RangeError when the snapshot is of a newer version or of a watch with another window or rank
 */
export function checkSnapshot(snapshot: WatchSnapshot, delays: number, rank: number): void {
  if (snapshot.version !== SNAPSHOT_VERSION) {
    throw new RangeError(
      `the watch's snapshot has version ${snapshot.version}, this program reads up to ${SNAPSHOT_VERSION}; ` +
        `use the newer program, or take the watch out of use and start it again`,
    );
  }
  if (snapshot.delays !== delays || snapshot.rank !== rank) {
    throw new RangeError(
      `the snapshot is of a watch with ${snapshot.delays} delays and rank ${snapshot.rank}, the model has ${delays} and ` +
        `${rank}; start the watch afresh`,
    );
  }
}
