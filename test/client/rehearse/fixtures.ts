import type { OperatingRow } from '../../../shared-types/rehearsal.ts';
import { score } from '../fixtures.ts';

export function operatingRow(changes: Partial<OperatingRow> = {}): OperatingRow {
  return {
    threshold: 1.7,
    rearm: 1.36,
    score: score({ falsePerHour: { value: 0.8, low: 0.3, high: 1.9 } }),
    leads: new Float64Array(),
    recording: new Uint16Array(),
    at: new Float64Array(),
    outcome: new Uint8Array(),
    switches: new Uint8Array(),
    ...changes,
  };
}
