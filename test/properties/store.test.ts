import fc from 'fast-check';
import { expect, test } from 'vitest';
import { readCsv, writeCsv } from '../../server/recordings/csv.ts';
import { openStore } from '../../server/store/openStore.ts';
import type { FrameToStore } from '../../server/store/store.ts';
import { temporaryFolder } from '../server/store/temporaryFolder.ts';

const SEED = 20_240_517;

const value = fc.oneof(
  { weight: 8, arbitrary: fc.double({ noNaN: true, noDefaultInfinity: true }) },
  fc.constant(Number.NaN),
);
const piece = fc.record({
  /** seconds after the last sample (negative: a step back in time) */
  pause: fc.oneof(
    { weight: 6, arbitrary: fc.constantFrom(0.01, 0.25, 1 / 3) },
    fc.double({ min: -50, max: 50, noNaN: true }),
  ),
  dt: fc.constantFrom(0.01, 0.25, 1 / 3),
  jitter: fc.boolean(),
  count: fc.oneof(fc.integer({ min: 1, max: 8 }), fc.integer({ min: 1, max: 2600 })),
  seed: value,
  after: fc.constantFrom('go on', 'wait', 'open again'),
});

function framesOf(
  pieces: fc.Arbitrary<typeof piece extends fc.Arbitrary<infer P> ? P[] : never> extends fc.Arbitrary<infer L>
    ? L
    : never,
) {
  let last = 1e9;
  return pieces.map(({ pause, dt, jitter, count, seed, after }, seq) => {
    const t0 = last + pause;
    const values = Float64Array.from({ length: count }, (_, i) => (i % 7 === 3 ? seed : seq + Math.sin(i)));
    const times = jitter ? Float64Array.from(values, (_, i) => t0 + i * dt + (i % 3) * dt * 0.2) : null;
    last = times === null ? t0 + (count - 1) * dt : times[count - 1]!;
    const frame: FrameToStore = { channel: 'A', run: 'r', seq, digest: seq, t0, dt, times, values };
    return { frame, after };
  });
}

test('any sequence of frames, commits and openings gives back the same samples, bit for bit', async () => {
  await fc.assert(
    fc.asyncProperty(fc.array(piece, { minLength: 1, maxLength: 12 }), async (pieces) => {
      const folder = temporaryFolder();
      const frames = framesOf(pieces);
      let store = openStore(folder, { commitEvery: 0.001 });
      for (const { frame, after } of frames) {
        const done = store.appendFrames([frame]);
        if (after !== 'go on') await done;
        if (after !== 'open again') continue;
        await store.close();
        store = openStore(folder, { commitEvery: 0.001 });
      }
      const times: number[] = [];
      const values: number[] = [];
      for (;;) {
        const block = await store.samplesFrom('A', times.length, 1000);
        if (block.times.length === 0) break;
        expect(block.ordinal).toBe(times.length);
        times.push(...block.times);
        values.push(...block.values);
      }
      await store.close();
      const all = frames.map(({ frame }) => frame);
      expect(Float64Array.from(values)).toEqual(Float64Array.from(all.flatMap((frame) => [...frame.values])));
      expect(Float64Array.from(times)).toEqual(
        Float64Array.from(all.flatMap((f) => [...f.values].map((_, i) => f.times?.[i] ?? f.t0 + i * f.dt))),
      );
    }),
    { seed: SEED, numRuns: 40 },
  );
});

test('every drawn column is the least and greatest of the samples up to the next column, and none is left out', async () => {
  await fc.assert(
    fc.asyncProperty(
      fc.array(
        piece.map((p) => ({ ...p, pause: Math.abs(p.pause) + 0.001, count: p.count * 4 })),
        { minLength: 1, maxLength: 8 },
      ),
      fc.integer({ min: 1, max: 400 }),
      fc.double({ min: 0, max: 1, noNaN: true }),
      fc.double({ min: 0, max: 1, noNaN: true }),
      async (pieces, columns, a, b) => {
        const frames = framesOf(pieces).map(({ frame }) => frame);
        const store = openStore(temporaryFolder(), { commitEvery: 0.001 });
        await store.appendFrames(frames);
        const { times, values } = await store.samplesBetween('A', -Infinity, Infinity);
        const span = times.at(-1)! - times[0]!;
        const [from, to] = [times[0]! + span * Math.min(a, b), times[0]! + span * Math.max(a, b)];
        const drawn = await store.signalColumns('A', from, to, columns);
        await store.close();
        const kept = [...drawn.t.keys()].filter((k) => !Number.isNaN(drawn.low[k]!));
        expect(kept.length).toBeLessThanOrEqual(2 * columns);
        drawn.t.forEach((t, k) => {
          if (k > 0) expect(t).toBeGreaterThan(drawn.t[k - 1]!);
        });
        const inside = [...times.keys()].filter(
          (i) => times[i]! >= from && times[i]! <= to && !Number.isNaN(values[i]!),
        );
        if (inside.length > 0) expect(drawn.t[kept[0]!]).toBe(times[inside[0]!]);
        let next = 0;
        for (let k = 0; k < kept.length; k++) {
          const end = drawn.t[kept[k + 1]!] ?? Infinity;
          let [low, high] = [Infinity, -Infinity];
          for (; next < inside.length && times[inside[next]!]! < end; next++) {
            low = Math.min(low, values[inside[next]!]!);
            high = Math.max(high, values[inside[next]!]!);
          }
          expect([drawn.low[kept[k]!], drawn.high[kept[k]!]]).toEqual([low, high]);
        }
        expect(next).toBe(inside.length);
      },
    ),
    { seed: SEED, numRuns: 40 },
  );
});

test('a recording written as CSV and read again is the same, bit for bit', () => {
  fc.assert(
    fc.property(
      fc.array(fc.tuple(fc.double({ min: -1e9, max: 2e9, noNaN: true }), value, value), {
        minLength: 1,
        maxLength: 200,
      }),
      (rows) => {
        const sorted = [...new Map(rows.map((row) => [row[0] + 0, row])).values()].sort(
          (p, q) => p[0] - q[0],
        );
        const times = Float64Array.from(sorted, (row) => row[0]);
        const channels = [1, 2].map((c) => ({
          channel: `c${c}`,
          unit: 'K',
          times,
          values: Float64Array.from(sorted, (row) => row[c]!),
        }));
        const read = readCsv(writeCsv({ name: 'r', sha256: '', channels }), 'r').channels;
        read.forEach(({ channel, unit, times: t, values }, c) => {
          expect([channel, unit]).toEqual([channels[c]!.channel, 'K']);
          expect(t.every((time, i) => Object.is(time, times[i]))).toBe(true);
          expect(values.every((v, i) => Object.is(v, channels[c]!.values[i]))).toBe(true);
        });
      },
    ),
    { seed: SEED, numRuns: 200 },
  );
});
