import fc from 'fast-check';
import { beforeAll, describe, expect, it } from 'vitest';
import { fitModel } from '../../server/model/fit.ts';
import { lorenzSeries } from '../../server/rigs/lorenz.ts';
import { createRandom } from '../../server/rigs/random.ts';
import { gradeSwitch, gradeWarning } from '../../server/watch/grading.ts';
import { parseRegimeRule } from '../../server/watch/regimeRuleText.ts';
import type { Frame, Happening, Watch, WatchSettings, WatchSnapshot } from '../../server/watch/types.ts';
import { createWatch } from '../../server/watch/watch.ts';
import { watchRuleWithDefaults } from '../../server/watch/watchRule.ts';
import type { Model } from '../../shared-types/model.ts';

const INTERVAL = 0.02;
const DELAYS = 12;
const RANK = 4;
const SEED = 20261201;

interface Samples {
  channel: string;
  times: Float64Array;
  values: Float64Array;
}

/** The Lorenz signal as a bad rig gives it: noise, jitter, dropped samples, gaps, NaN. */
function roughSignal(channel: string, length: number, seed: number): Samples {
  const random = createRandom(seed);
  const clean = lorenzSeries({ start: [-8, 8, 27], step: 0.005, every: 4, samples: length });
  const times: number[] = [];
  const values: number[] = [];
  for (let i = 0; i < length; i++) {
    if (random.uniform() < 0.02 || (i > 900 && i < 930) || (i > 2000 && i < 2200)) continue;
    const jitter = random.uniform() < 0.3 ? (random.uniform() - 0.5) * 0.4 * INTERVAL : 0;
    times.push(1.7e9 + i * INTERVAL + jitter);
    values.push(random.uniform() < 0.01 ? Number.NaN : clean[i]! + 0.08 * random.gaussian());
  }
  return { channel, times: Float64Array.from(times), values: Float64Array.from(values) };
}

interface Told {
  times: number[];
  newest: number[];
  values: number[];
  happenings: Happening[];
}

const nothingTold = (): Told => ({ times: [], newest: [], values: [], happenings: [] });

function feed(watch: Watch, frame: Frame, told: Told): void {
  const steps = watch.push(frame, told.happenings);
  told.times.push(...steps.time.subarray(0, steps.count));
  told.newest.push(...steps.newest.subarray(0, steps.count));
  told.values.push(...steps.value.subarray(0, steps.count));
}

const frameOf = (samples: Samples, from: number, to: number): Frame => ({
  channel: samples.channel,
  t0: samples.times[from]!,
  dt: 0,
  times: samples.times.slice(from, to),
  values: samples.values.slice(from, to),
});

/** Cuts a signal into frames of the given sizes, over and over. */
function framesOf(samples: Samples, sizes: readonly number[]): Frame[] {
  const frames: Frame[] = [];
  for (let from = 0, i = 0; from < samples.times.length; i++) {
    const to = Math.min(samples.times.length, from + sizes[i % sizes.length]!);
    frames.push(frameOf(samples, from, to));
    from = to;
  }
  return frames;
}

let model: Model;
let settings: WatchSettings;
let signal: Samples;
let whole: Told;

beforeAll(() => {
  const training = lorenzSeries({ start: [3, 1, 20], step: 0.005, every: 4, samples: 20_000 });
  const random = createRandom(1);
  const noisy = training.map((value) => value + 0.08 * random.gaussian());
  model = fitModel([[noisy]], INTERVAL, {
    name: 'loop',
    channels: [{ channel: 'x', unit: '' }],
    delays: DELAYS,
    rank: RANK,
    center: 'mean',
    gapIntervals: 3,
  });
  settings = {
    model,
    channels: ['x'],
    rule: watchRuleWithDefaults({ variable: 'forcing', threshold: 1.5, leastLead: 0.2, horizon: 0.7 }),
    regime: parseRegimeRule('sides:-0.8,0.8'),
    regimeChannel: null,
  };
  signal = roughSignal('x', 6000, 7);
  whole = nothingTold();
  feed(createWatch(settings), frameOf(signal, 0, signal.times.length), whole);
});

describe('a watch', () => {
  it('has something to say about the signal of this test', () => {
    const kinds = new Set(whole.happenings.map(({ kind }) => kind));
    expect([...kinds].sort()).toEqual(expect.arrayContaining(['gap', 'graded', 'switch', 'warning']));
    expect(whole.happenings.filter(({ kind }) => kind === 'warning').length).toBeGreaterThan(20);
  });

  it('says the same for any framing, to the bit and in the same order', () => {
    fc.assert(
      fc.property(fc.array(fc.integer({ min: 1, max: 3000 }), { minLength: 1, maxLength: 6 }), (sizes) => {
        const told = nothingTold();
        const watch = createWatch(settings);
        for (const frame of framesOf(signal, sizes)) feed(watch, frame, told);
        expect(told).toEqual(whole);
      }),
      { seed: SEED, numRuns: 12, examples: [[[1]], [[7]], [[1024]], [[1025, 1]]] },
    );
  });

  it('goes on from a snapshot as if it had never been stopped', () => {
    fc.assert(
      fc.property(fc.array(fc.integer({ min: 1, max: 900 }), { minLength: 2, maxLength: 5 }), (sizes) => {
        const told = nothingTold();
        let watch = createWatch(settings);
        for (const frame of framesOf(signal, sizes)) {
          feed(watch, frame, told);
          const kept: WatchSnapshot = watch.snapshot();
          // what the stopped watch does afterwards must not reach into the snapshot
          feed(watch, frameOf(signal, 0, 50), nothingTold());
          watch = createWatch(settings, kept);
        }
        expect(told).toEqual(whole);
      }),
      { seed: SEED, numRuns: 8 },
    );
  });

  it('has the coordinates of the batch definition, window by window, to 1e-12', () => {
    const clean = lorenzSeries({ start: [-8, 8, 27], step: 0.005, every: 4, samples: 3000 });
    const told = nothingTold();
    feed(createWatch(settings), { channel: 'x', t0: 0, dt: INTERVAL, times: null, values: clean }, told);
    for (let n = 0; n < clean.length; n++) {
      let forcing = 0;
      for (let j = 0; j < DELAYS; j++) {
        forcing += model.coordinates[j * RANK + RANK - 1]! * (clean[n - j]! - model.channels[0]!.mean);
      }
      if (n < DELAYS - 1) expect(told.values[n]).toBeNaN();
      else expect(Math.abs(told.values[n]! - Math.abs(forcing))).toBeLessThan(1e-12);
    }
  });

  it('grades live as the whole record is graded afterwards', () => {
    const warnings = whole.happenings.flatMap((one) => (one.kind === 'warning' ? [one.at] : []));
    const switches = whole.happenings.flatMap((one) => (one.kind === 'switch' ? [one.at] : []));
    const unseen = whole.happenings.flatMap((one) =>
      one.kind === 'gap' ? [{ from: one.from, to: one.to }] : [],
    );
    const sight: { from: number; to: number }[] = [];
    whole.values.forEach((value, i) => {
      if (Number.isNaN(value)) return;
      if (i === 0 || Number.isNaN(whole.values[i - 1]!))
        sight.push({ from: whole.times[i]!, to: whole.times[i]! });
      sight.at(-1)!.to = whole.times[i]!;
    });
    const record = { warnings, switches, sight, unseen };
    const spans = { interval: INTERVAL, leastLead: 10, horizon: 35 };
    const graded = whole.happenings.filter((one) => one.kind === 'graded');
    expect(graded.length).toBeGreaterThan(20);
    for (const one of graded) {
      const { outcome, lead } = gradeWarning(record, warnings.indexOf(one.at), spans, signal.times.at(-1)!);
      expect([one.at, one.outcome, one.lead]).toEqual([one.at, outcome, lead]);
    }
    for (const one of whole.happenings.filter((happening) => happening.kind === 'switch')) {
      expect([one.at, one.outcome]).toEqual([one.at, gradeSwitch(record, one.at, spans).outcome]);
    }
  });

  it('is blind after a long gap until its window is full again', () => {
    const watch = createWatch(settings);
    feed(
      watch,
      { channel: 'x', t0: 0, dt: INTERVAL, times: null, values: new Float64Array(50) },
      nothingTold(),
    );
    expect(watch.sight()).toEqual({ kind: 'seeing' });
    feed(
      watch,
      { channel: 'x', t0: 10, dt: INTERVAL, times: null, values: new Float64Array(2) },
      nothingTold(),
    );
    const sight = watch.sight();
    expect(sight.kind === 'blind' && sight.left).toBeCloseTo(10 * INTERVAL, 12);
  });
});

describe('a watch over two channels', () => {
  it('says the same for any framing and any interleaving of the channels', () => {
    const second = roughSignal('y', 6000, 11);
    const training = lorenzSeries({ start: [3, 1, 20], step: 0.005, every: 4, samples: 10_000 });
    const random = createRandom(3);
    const noisy = () => training.map((value) => value + 0.3 * random.gaussian());
    const pair = fitModel([[noisy(), noisy()]], INTERVAL, {
      name: 'pair',
      channels: [
        { channel: 'x', unit: '' },
        { channel: 'y', unit: '' },
      ],
      delays: DELAYS,
      rank: RANK,
      center: 'mean',
      gapIntervals: 3,
    });
    const both: WatchSettings = { ...settings, model: pair, channels: ['x', 'y'] };
    const run = (frames: Frame[]) => {
      const told = nothingTold();
      const watch = createWatch(both);
      for (const frame of frames) feed(watch, frame, told);
      const { happenings, ...steps } = told;
      const sorted = happenings.map((one) => JSON.stringify(one)).sort();
      return { ...steps, sorted };
    };
    const one = run([frameOf(signal, 0, signal.times.length), frameOf(second, 0, second.times.length)]);
    expect(one.values.filter((value) => !Number.isNaN(value)).length).toBeGreaterThan(3000);
    expect(one.sorted.length).toBeGreaterThan(20);
    fc.assert(
      fc.property(
        fc.array(fc.integer({ min: 1, max: 800 }), { minLength: 1, maxLength: 4 }),
        fc.array(fc.integer({ min: 1, max: 800 }), { minLength: 1, maxLength: 4 }),
        (a, b) => {
          const frames = [...framesOf(signal, a), ...framesOf(second, b)];
          frames.sort((left, right) => left.times![0]! - right.times![0]!);
          expect(run(frames)).toEqual(one);
        },
      ),
      { seed: SEED, numRuns: 8 },
    );
  });
});
