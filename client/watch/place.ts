/** A moment of a strip: channel, channel time (s) and how much around it is looked at (s). */
export interface StripPlace {
  channel: string;
  at: number;
  seconds: number;
}

/** The address that shows a strip at a moment. */
export function stripAddress({ channel, at, seconds }: StripPlace): string {
  return `#/at/${encodeURIComponent(channel)}/${at}/${Number(seconds.toPrecision(3))}`;
}

/** The moment an address shows; null where it shows none. */
export function stripPlaceAt(hash: string): StripPlace | null {
  const parts = /^#\/at\/([^/]+)\/([^/]+)\/([^/]+)$/.exec(hash);
  if (parts === null) return null;
  const [at, seconds] = [Number(parts[2]), Number(parts[3])];
  if (!Number.isFinite(at) || !(seconds > 0) || !Number.isFinite(seconds)) return null;
  try {
    return { channel: decodeURIComponent(parts[1]!), at, seconds };
  } catch {
    return null;
  }
}
