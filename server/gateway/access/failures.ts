/** Wrong tokens by address of the sender. */
export interface Failures {
  note(address: string): void;
  /** so many lately that each is only turned away */
  tooMany(address: string): boolean;
}

/** From one address so many wrong tokens in so many seconds are answered and logged one by one. */
export const MOST_FAILURES = 20;
export const FAILURES_SECONDS = 60;
/** addresses remembered; beyond it all are forgotten */
const MOST_ADDRESSES = 10_000;

/** @param now Unix seconds */
export function createFailures(now: () => number): Failures {
  const lately = new Map<string, { since: number; count: number }>();
  const of = (address: string) => {
    const known = lately.get(address);
    return known !== undefined && now() - known.since < FAILURES_SECONDS ? known : null;
  };
  return {
    note(address) {
      const known = of(address);
      if (known !== null) known.count++;
      else {
        if (lately.size >= MOST_ADDRESSES) lately.clear();
        lately.set(address, { since: now(), count: 1 });
      }
    },
    tooMany: (address) => (of(address)?.count ?? 0) >= MOST_FAILURES,
  };
}
