import { describe, expect, it } from 'vitest';
import { stampOnArrival } from '../../../../server/gateway/ingest/arrivalStamps.ts';

describe('stamps of frames without times', () => {
  it('put the newest sample of the first frame at its arrival', () => {
    expect(stampOnArrival(null, 100, 0.1, 11)).toEqual({ ok: true, t0: 99 });
  });

  it('keep regular data regular under a jittering network', () => {
    expect(stampOnArrival(100, 100.137, 0.1, 1)).toEqual({ ok: true, t0: 100.1 });
    expect(stampOnArrival(100, 100.061, 0.1, 1)).toEqual({ ok: true, t0: 100.1 });
  });

  it('begin anew at arrival after a pause', () => {
    expect(stampOnArrival(100, 160, 0.5, 3)).toEqual({ ok: true, t0: 159 });
  });

  it('never step back', () => {
    const stamp = stampOnArrival(100, 99, 0.1, 5);
    expect(stamp).toEqual({ ok: true, t0: 100.1 });
  });

  it('refuse in words what comes much faster than its dt says', () => {
    const stamp = stampOnArrival(200, 100, 1, 1);
    expect(stamp.ok).toBe(false);
    expect(stamp.ok ? '' : stamp.detail).toMatch(/ahead of the clock; send the true dt/);
  });
});
