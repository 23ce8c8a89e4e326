/** What one connection may use up: refilled steadily, at most one second's worth is saved up. */
export interface Allowance {
  /** uses some at a moment (seconds that never step); returns how long to wait before more is used, seconds */
  use(amount: number, at: number): number;
}

/** @param perSecond what may be used a second */
export function createAllowance(perSecond: number): Allowance {
  let left = perSecond;
  let filledAt: number | null = null;
  return {
    use(amount, at) {
      if (filledAt !== null) left = Math.min(perSecond, left + (at - filledAt) * perSecond);
      filledAt = at;
      left -= amount;
      return left >= 0 ? 0 : -left / perSecond;
    },
  };
}
