/**
 * How early and how well the forcing warns on noisy Lorenz data, with window, rank and threshold chosen on the first
 * half of each recording and scored on the second.
 */
import { chooseSettings } from '../../server/rehearsal/chooseSettings.ts';
import { lorenzSeries } from '../../server/rigs/lorenz.ts';
import { createRandom } from '../../server/rigs/random.ts';
import type { Model } from '../../shared-types/model.ts';
import { RehearsalRequest } from '../../shared-types/rehearsal.ts';

/** named once the grid was settled: nothing below was chosen by looking at them */
export const SEEDS = ['fir', 'ginkgo', 'hazel', 'ivy', 'juniper'];
export const INTERVAL = 0.02;
export const SAMPLES = 50_000;
const WINDOWS = [8, 10, 12, 16, 20, 28, 35, 42];
const RANKS = [2, 3, 4];
/** the window and rank of the published noise-free example */
const PUBLISHED = { delays: 100, rank: 15 };

/** Least lead and horizon in the equations' unit of time, and the skill share that must be reached on average. */
export const CASES = [
  { leastLead: 0.2, horizon: 0.7, least: 0.78 },
  { leastLead: 0.5, horizon: 1.0, least: 0.7 },
];

/** What was found for one seed: with settings from evidence, and with the published window and rank. */
export interface EvidenceRow {
  seed: string;
  chosen: Model;
  published: Model;
}

/** x of the Lorenz equations from a random start, after 30 units, with noise of 1 % of its standard deviation. */
export function noisyLorenz(seed: string): { times: Float64Array; values: Float64Array; deviation: number } {
  const random = createRandom(seed);
  const start = [5 * random.gaussian(), 5 * random.gaussian(), 25 + 5 * random.gaussian()] as const;
  const settled = 30 / INTERVAL;
  const clean = lorenzSeries({ start, step: 0.002, every: 10, samples: SAMPLES + settled }).subarray(settled);
  const mean = clean.reduce((sum, x) => sum + x, 0) / SAMPLES;
  const deviation = Math.sqrt(clean.reduce((sum, x) => sum + (x - mean) ** 2, 0) / SAMPLES);
  return {
    times: clean.map((_, i) => i * INTERVAL),
    values: clean.map((x) => x + 0.01 * deviation * random.gaussian()),
    deviation,
  };
}

/** Windows in samples and ranks to choose among; nothing is tried but the forcing. */
function modelFor(
  seed: string,
  { leastLead, horizon }: { leastLead: number; horizon: number },
  windows: readonly number[],
  ranks: readonly number[],
): Model {
  const { times, values, deviation } = noisyLorenz(seed);
  return chooseSettings({
    request: RehearsalRequest.parse({
      recordings: [seed],
      channels: ['x'],
      regime: `sides:${-0.1 * deviation},${0.1 * deviation}`,
      leastLead,
      horizon,
      variable: 'forcing',
      windows: windows.map((delays) => delays * INTERVAL),
      ranks,
    }),
    recordings: [{ name: seed, sha256: seed, series: [{ channel: 'x', times, values }], leftOut: [] }],
    program: 'evidence',
    at: '2026-01-01T00:00:00Z',
    interval: INTERVAL,
  });
}

/** Runs one case over all seeds. */
export function runCase(leastLead: number, horizon: number): EvidenceRow[] {
  const spans = { leastLead, horizon };
  return SEEDS.map((seed) => ({
    seed,
    chosen: modelFor(seed, spans, WINDOWS, RANKS),
    published: modelFor(seed, spans, [PUBLISHED.delays], [PUBLISHED.rank]),
  }));
}

/** Mean skill share over the seeds. */
export function meanShare(rows: EvidenceRow[], pick: (row: EvidenceRow) => Model): number {
  return rows.reduce((sum, row) => sum + (pick(row).score!.skillShare ?? Number.NaN), 0) / rows.length;
}

/** One case as lines of text. */
export function tableOf(leastLead: number, horizon: number, rows: EvidenceRow[]): string {
  const lines = [
    `Lorenz x, noise 1 % of the sd, interval ${INTERVAL}, ${SAMPLES} samples; switch: sides at ± a tenth of the sd;`,
    `first half for choosing, second judged; windows ${WINDOWS.join(' ')} samples, ranks ${RANKS.join(' ')};`,
    `variable |forcing|, re-arm, on-delay and hold-off chosen with it; seeds ${SEEDS.join(', ')}`,
    `least lead ${leastLead}, horizon ${horizon} (an orbit lasts 0.75)`,
    'seed       window rank threshold  switches detection came true  lead  (random)  skill  share      p',
    ...rows.map(({ seed, chosen }) => lineOf(seed, chosen)),
    `mean skill share ${meanShare(rows, ({ chosen }) => chosen).toFixed(3)}`,
    `with the published window and rank (${PUBLISHED.delays}, ${PUBLISHED.rank}):`,
    ...rows.map(({ seed, published }) => lineOf(seed, published)),
    `mean skill share ${meanShare(rows, ({ published }) => published).toFixed(3)}`,
  ];
  return `${lines.join('\n')}\n`;
}

function lineOf(seed: string, { delays, rank, rule, score }: Model): string {
  const number = (value: number | null, digits: number, width: number) =>
    (value === null ? '–' : value.toFixed(digits)).padStart(width);
  return [
    seed.padEnd(10),
    String(delays).padStart(6),
    String(rank).padStart(4),
    number(rule!.threshold, 2, 9),
    String(score!.switches.total).padStart(9),
    number(score!.detection.value, 3, 9),
    number(score!.cameTrue.value, 3, 9),
    number(score!.lead.median, 2, 5),
    number(score!.lead.random, 2, 8),
    number(score!.skill, 3, 7),
    number(score!.skillShare, 3, 6),
    number(score!.pValue, 3, 6),
  ].join(' ');
}
