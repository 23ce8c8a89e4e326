/** Sums by name since the server started. */
export interface Counter {
  add(name: string, by: number): void;
  entries(): [string, number][];
}

/** What came in. */
export interface Counts {
  /** by channel */
  frames: Counter;
  samples: Counter;
  /** frames that were refused, by code */
  refused: Counter;
}

export function createCounter(): Counter {
  const sums = new Map<string, number>();
  return {
    add(name, by) {
      sums.set(name, (sums.get(name) ?? 0) + by);
    },
    entries: () => [...sums],
  };
}

export const createCounts = (): Counts => ({
  frames: createCounter(),
  samples: createCounter(),
  refused: createCounter(),
});
