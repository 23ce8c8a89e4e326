/**
 * How often each verdict is given where nothing, or next to nothing, can be known: noise without a model behind it, and
 * a particle that noise alone drives between two wells. None of these may be called useful more than now and then.
 */
import { wilsonInterval } from '../../server/rehearsal/intervals.ts';
import { runRehearsal } from '../../server/rehearsal/rehearsal.ts';
import { doubleWellSeries } from '../../server/rigs/doubleWell.ts';
import { redNoise, whiteNoise } from '../../server/rigs/noise.ts';
import { RehearsalRequest, type RehearsalResult, type VerdictKind } from '../../shared-types/rehearsal.ts';

/** A process about whose switches nothing, or little, can be known. */
export interface Blank {
  name: string;
  regime: string;
  interval: number;
  leastLead: number;
  horizon: number;
  samples: number;
  /** white noise: what comes does not depend on what was */
  nothingToKnow: boolean;
  /** run with every test run, on short recordings */
  inSuite: boolean;
  series: (seed: string, samples: number) => Float64Array;
}

export const BLANKS: readonly Blank[] = [
  {
    name: 'white noise',
    regime: 'excursion:2,1,0',
    interval: 1,
    leastLead: 1,
    horizon: 10,
    samples: 4000,
    nothingToKnow: true,
    inSuite: true,
    series: whiteNoise,
  },
  {
    name: 'red noise, φ = 0.9, excursion',
    regime: 'excursion:2,1,0',
    interval: 1,
    leastLead: 2,
    horizon: 20,
    samples: 8000,
    nothingToKnow: false,
    inSuite: false,
    series: (seed, samples) => redNoise(seed, samples, 0.9),
  },
  {
    name: 'red noise, φ = 0.9, sides',
    regime: 'sides:-0.5,0.5',
    interval: 1,
    leastLead: 1,
    horizon: 8,
    samples: 4000,
    nothingToKnow: false,
    inSuite: true,
    series: (seed, samples) => redNoise(seed, samples, 0.9),
  },
  {
    name: 'red noise, φ = 0.98, sides',
    regime: 'sides:-1,1',
    interval: 1,
    leastLead: 5,
    horizon: 40,
    samples: 12_000,
    nothingToKnow: false,
    inSuite: false,
    series: (seed, samples) => redNoise(seed, samples, 0.98),
  },
  {
    name: 'double well, D = 0.1',
    regime: 'sides:-0.5,0.5',
    interval: 0.2,
    leastLead: 1,
    horizon: 6,
    samples: 20_000,
    nothingToKnow: false,
    inSuite: true,
    series: (seed, samples) => doubleWellSeries(seed, { noise: 0.1, step: 0.01 }, 20, samples),
  },
];

export const KINDS: readonly VerdictKind[] = [
  'too few events',
  'no skill',
  'no better than',
  'weak',
  'useful',
];

/** Rehearses a blank with one seed. */
export function rehearseBlank(blank: Blank, seed: string, samples = blank.samples): RehearsalResult {
  const { name, regime, leastLead, horizon, interval } = blank;
  const values = blank.series(`${name} ${seed}`, samples);
  const times = values.map((_, i) => i * interval);
  return runRehearsal({
    request: RehearsalRequest.parse({ recordings: [seed], channels: ['x'], regime, leastLead, horizon }),
    recordings: [
      { name: seed, sha256: seed, series: [{ channel: 'x', unit: '', times, values }], leftOut: [] },
    ],
    program: 'evidence',
    at: '2026-01-01T00:00:00Z',
    interval,
  });
}

/** The verdicts of one blank, counted, as lines of text. */
export function verdictLines(blank: Blank, results: readonly RehearsalResult[]): string[] {
  const { name, regime, leastLead, horizon, interval } = blank;
  const counts = KINDS.map((kind) => results.filter(({ verdict }) => verdict.kind === kind).length);
  const useful = wilsonInterval(counts.at(-1)!, results.length);
  const percent = (share: number | null) => `${(100 * share!).toFixed(1)} %`;
  return [
    `${name} (${regime}; interval ${interval}, least lead ${leastLead}, horizon ${horizon}), ${results.length} seeds:`,
    `  ${KINDS.map((kind, i) => `${kind} ${counts[i]}`).join(', ')}`,
    `  useful ${percent(useful.value)}, 95 % interval ${percent(useful.low)} to ${percent(useful.high)}; ` +
      `median of skill ${median(results.map(({ score }) => score.skill)).toFixed(3)}, ` +
      `of skill share ${median(results.map(({ score }) => score.skillShare)).toFixed(3)}, ` +
      `of came true ${median(results.map(({ score }) => score.cameTrue.value)).toFixed(3)}, ` +
      `of switches judged ${median(results.map(({ score }) => score.switches.total))}`,
  ];
}

function median(values: readonly (number | null)[]): number {
  const known = values.filter((value) => value !== null).sort((a, b) => a - b);
  return known.length === 0 ? Number.NaN : known[known.length >> 1]!;
}
