import { describe, expect, it } from 'vitest';
import { createWatchBook } from '../../../../server/gateway/watches/watchBook.ts';
import type { SwitchEvent, Warning } from '../../../../shared-types/warning.ts';

const SPANS = { leastLead: 10, horizon: 20, interval: 0.5 };
const NOW = 1.8e9;

const warning = (id: number, at: number, changes: Partial<Warning> = {}) =>
  ({
    id,
    at,
    from: at + 10,
    to: at + 20,
    outcome: 'open',
    quiet: false,
    acknowledgedAt: null,
    ...changes,
  }) as Warning;
const warned = (at: number) => ({ at, outcome: 'warned', lead: 15 }) as SwitchEvent;
const graded = (at: number, outcome: 'true' | 'false') =>
  ({ kind: 'graded', at, outcome, switchAt: null, lead: null }) as const;

describe('what people had of warnings', () => {
  it('has no warning that was made too late to speak, and a switch covered by such ones alone came too late', () => {
    const book = createWatchBook({ warnings: [], switches: [] }, SPANS);
    book.issue(warning(1, 0, { quiet: true }));
    book.meet(warned(15));
    book.settle(graded(0, 'true'));
    expect(book.tally.switches).toMatchObject({ warned: 1, late: 0 });
    expect(book.tally.warnings.true).toBe(1);
    expect(book.heard.switches).toMatchObject({ warned: 0, late: 1 });
    expect(book.heard.warnings).toMatchObject({ true: 0, open: 0 });
    expect(book.heard.leads).toEqual([]);
  });

  it('counts the lead from the first warning that could be heard', () => {
    const book = createWatchBook({ warnings: [], switches: [] }, SPANS);
    book.issue(warning(1, 0, { quiet: true }));
    book.issue(warning(2, 4));
    book.meet(warned(15));
    expect(book.heard.switches.warned).toBe(1);
    expect(book.heard.leads).toEqual([11]);
  });

  it('does not begin before the watch did; elapsed time has no beginning to compare', () => {
    const book = createWatchBook({ warnings: [], switches: [] }, SPANS, NOW);
    book.issue(warning(1, NOW - 100));
    book.meet(warned(NOW - 85));
    expect([book.heard.warnings.open, book.heard.switches.warned]).toEqual([0, 0]);
    book.issue(warning(2, NOW + 1));
    book.meet(warned(NOW + 16));
    expect([book.heard.warnings.open, book.heard.switches.warned]).toEqual([1, 1]);
    const elapsed = createWatchBook({ warnings: [], switches: [] }, SPANS, NOW);
    elapsed.issue(warning(1, 5));
    expect(elapsed.heard.warnings.open).toBe(1);
  });

  it('is the same from what the store knows as it was live', () => {
    const warnings = [warning(1, 0, { quiet: true, outcome: 'true' }), warning(2, 40, { outcome: 'false' })];
    const live = createWatchBook({ warnings: [], switches: [] }, SPANS);
    for (const one of warnings) live.issue({ ...one });
    live.meet(warned(15));
    expect(createWatchBook({ warnings, switches: [warned(15)] }, SPANS).heard).toEqual(live.heard);
  });
});
