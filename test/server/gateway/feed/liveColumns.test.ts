import { describe, expect, it } from 'vitest';
import { createLiveColumns } from '../../../../server/gateway/feed/liveColumns.ts';

const listed = (columns: ReturnType<ReturnType<typeof createLiveColumns>['take']>) =>
  columns && { t: [...columns.t], low: [...columns.low], high: [...columns.high] };

describe('live drawing columns', () => {
  it('are the samples themselves where there are fewer samples than columns', () => {
    const live = createLiveColumns(0, 1);
    live.add(null, 10, 1, Float64Array.of(1, 2, 3));
    expect(listed(live.take())).toEqual({ t: [10, 11, 12], low: [1, 2, 3], high: [1, 2, 3] });
    expect(live.take()).toBeNull();
  });

  it('hold the extremes of a fixed raster, the unfinished column again under its own start', () => {
    const live = createLiveColumns(10, 1);
    live.add(
      null,
      10,
      1,
      Float64Array.from({ length: 15 }, (_, i) => (i % 2 ? -i : i)),
    );
    expect(listed(live.take())).toEqual({ t: [10, 20], low: [-9, -13], high: [8, 14] });
    live.add(null, 25, 1, Float64Array.of(100, -100));
    expect(listed(live.take())).toEqual({ t: [20], low: [-100], high: [100] });
  });

  it('begin at their first sample, not to replace the history that ends before it', () => {
    const live = createLiveColumns(10, 1);
    live.add(null, 17, 1, Float64Array.of(5, 6, 7, 8));
    expect(listed(live.take())).toEqual({ t: [17, 20], low: [5, 8], high: [7, 8] });
  });

  it('mark missing time and missing values with NaN', () => {
    const live = createLiveColumns(0, 1);
    live.add(null, 0, 1, Float64Array.of(1, Number.NaN));
    live.add(null, 9, 1, Float64Array.of(2));
    expect(listed(live.take())).toEqual({ t: [0, 1, 5, 9], low: [1, NaN, NaN, 2], high: [1, NaN, NaN, 2] });
  });

  it('draw the same whatever the frames were', () => {
    const values = Float64Array.from({ length: 200 }, (_, i) => Math.sin(i * 1.7) * i);
    const whole = createLiveColumns(7, 1);
    whole.add(null, 0, 1, values);
    const pieces = createLiveColumns(7, 1);
    for (let i = 0; i < 200; i += 13) pieces.add(null, i, 1, values.slice(i, i + 13));
    expect(listed(pieces.take())).toEqual(listed(whole.take()));
  });
});
