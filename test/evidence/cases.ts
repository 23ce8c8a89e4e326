/**
 * Simulated rigs on which a rehearsal is tried as a person would run it: settings searched for on the first half, judged
 * on the second, beside plain baselines. Nothing is given to it but the recording, the rule and the two spans.
 */
import { runRehearsal } from '../../server/rehearsal/rehearsal.ts';
import type { TaskSeries } from '../../server/rehearsal/task.ts';
import { createDisturbance } from '../../server/rigs/disturb.ts';
import { DUFFING_WANDERING, duffingSlope } from '../../server/rigs/duffing.ts';
import { HINDMARSH_ROSE_BURSTING, hindmarshRoseSlope } from '../../server/rigs/hindmarshRose.ts';
import { LORENZ_1963, lorenzSlope } from '../../server/rigs/lorenz.ts';
import { createRandom, type Random } from '../../server/rigs/random.ts';
import { ROSSLER_USUAL, rosslerSlope } from '../../server/rigs/rossler.ts';
import { column, createStepper, type Slope, stepInto, trajectory } from '../../server/rigs/rungeKutta.ts';
import { RehearsalRequest, type RehearsalResult } from '../../shared-types/rehearsal.ts';

/** Named before any of them was looked at. */
export const SEEDS = ['alder', 'birch', 'cedar', 'dogwood', 'elder'];

/** A rig, what is a switch on it and when a warning is wanted. Times in the equations' own unit. */
export interface Case {
  name: string;
  interval: number;
  leastLead: number;
  horizon: number;
  /** a switch, as a rule and in words */
  regime: string;
  regimeChannel?: string;
  words: string;
  samples: number;
  record: (seed: string, samples: number) => TaskSeries[];
}

/** How a system is integrated and what of it is recorded. */
interface Rig {
  slope: Slope;
  start: readonly number[];
  /** index and name of each recorded unknown */
  seen: readonly (readonly [number, string])[];
  interval: number;
  /** integration steps between samples */
  every: number;
  /** before the recording begins */
  burnIn: number;
}

/** Columns of a rig from a random start, once it has settled; clean. */
function cleanColumns(rig: Rig, random: Random, samples: number): Float64Array[] {
  const { slope, start, seen, interval, every, burnIn } = rig;
  const step = interval / every;
  const state = Float64Array.from(start, (value) => value + 0.3 * random.gaussian());
  const stepper = createStepper(slope, start.length);
  for (let i = 0; i < burnIn / step; i++) stepInto(stepper, state, step);
  const states = trajectory(slope, state, step, every, samples);
  return seen.map(([index]) => column(states, start.length, index));
}

function deviationOf(values: Float64Array): number {
  const mean = values.reduce((sum, one) => sum + one, 0) / values.length;
  return Math.sqrt(values.reduce((sum, one) => sum + (one - mean) ** 2, 0) / values.length);
}

/** Records a rig with noise of a share of each channel's standard deviation. */
const withNoise =
  (rig: Rig, noise = 0.01) =>
  (seed: string, samples: number): TaskSeries[] => {
    const random = createRandom(seed);
    return cleanColumns(rig, random, samples).map((values, i) => {
      const size = noise * deviationOf(values);
      return {
        channel: rig.seen[i]![1],
        unit: '',
        times: values.map((_, k) => k * rig.interval),
        values: values.map((value) => value + size * random.gaussian()),
      };
    });
  };

/** Records a rig's first channel roughly: 3 % noise, uneven times, lost samples, and a long gap now and then. */
const roughly =
  (rig: Rig) =>
  (seed: string, samples: number): TaskSeries[] => {
    const random = createRandom(seed);
    const [clean] = cleanColumns(rig, random, samples);
    const { interval } = rig;
    const noise = 0.03 * deviationOf(clean!);
    const rough = { noise, drift: 0, driftSeconds: 1, dropped: 0.01, jitter: 0.1 * interval };
    const disturb = createDisturbance(rough, interval, random);
    const sample = { time: 0, value: 0 };
    const times: number[] = [];
    const values: number[] = [];
    let gapFor = 0;
    clean!.forEach((value, i) => {
      disturb(i * interval, value, sample);
      if (gapFor > 0) gapFor--;
      else if (random.uniform() < 1 / 5000) gapFor = 100;
      if (gapFor > 0 || Number.isNaN(sample.value)) return;
      times.push(sample.time);
      values.push(sample.value);
    });
    const channel = rig.seen[0]![1];
    return [{ channel, unit: '', times: Float64Array.from(times), values: Float64Array.from(values) }];
  };

const LORENZ: Rig = {
  slope: lorenzSlope(LORENZ_1963),
  start: [5, 5, 25],
  seen: [[0, 'x']],
  interval: 0.02,
  every: 10,
  burnIn: 30,
};
const ROSSLER: Rig = {
  slope: rosslerSlope(ROSSLER_USUAL),
  start: [1, 1, 0.5],
  seen: [
    [0, 'x'],
    [2, 'z'],
  ],
  interval: 0.1,
  every: 5,
  burnIn: 200,
};
const DUFFING: Rig = {
  slope: duffingSlope(DUFFING_WANDERING),
  start: [1, 0, 0],
  seen: [[0, 'x']],
  interval: 0.05,
  every: 5,
  burnIn: 200,
};
const HINDMARSH_ROSE: Rig = {
  slope: hindmarshRoseSlope(HINDMARSH_ROSE_BURSTING),
  start: [0, 0, 3],
  seen: [[0, 'x']],
  interval: 0.5,
  every: 10,
  burnIn: 1000,
};

const lorenz = {
  interval: 0.02,
  // a tenth of the standard deviation of x, 7.9
  regime: 'sides:-0.79,0.79',
  words: 'x changes sides',
  samples: 50_000,
};

const rossler = {
  interval: 0.1,
  regime: 'excursion:8,2,3',
  regimeChannel: 'z',
  words: 'a burst of z, seen through x alone',
  samples: 30_000,
  record: withNoise(ROSSLER),
};
const duffing = {
  interval: 0.05,
  regime: 'sides:-0.5,0.5',
  words: 'x changes wells',
  samples: 50_000,
  record: withNoise(DUFFING),
};
const hindmarshRose = {
  interval: 0.5,
  regime: 'excursion:1,0,35',
  words: 'the first spike of a burst',
  samples: 40_000,
  record: withNoise(HINDMARSH_ROSE),
};

/** The cases, in the order of the table; 1 % noise where nothing is said. */
export const CASES: readonly Case[] = [
  { name: 'Lorenz loop', ...lorenz, leastLead: 0.2, horizon: 0.7, record: withNoise(LORENZ) },
  { name: 'Lorenz loop, rough', ...lorenz, leastLead: 0.2, horizon: 0.7, record: roughly(LORENZ) },
  { name: 'Rössler', ...rossler, leastLead: 1, horizon: 6 },
  { name: 'Duffing', ...duffing, leastLead: 0.5, horizon: 3 },
  { name: 'Hindmarsh–Rose', ...hindmarshRose, leastLead: 2.5, horizon: 30 },
];

/** The same rigs with an earlier warning wanted. */
export const EARLY_CASES: readonly Case[] = [
  { name: 'Lorenz loop, early', ...lorenz, leastLead: 0.5, horizon: 1, record: withNoise(LORENZ) },
  { name: 'Rössler, early', ...rossler, leastLead: 6.5, horizon: 10 },
  { name: 'Duffing, early', ...duffing, leastLead: 2, horizon: 5 },
  { name: 'Hindmarsh–Rose, early', ...hindmarshRose, leastLead: 12, horizon: 40 },
];

/** What one seed of a case gave. */
export interface CaseRow {
  seed: string;
  result: RehearsalResult;
}

/** Rehearses one case with one seed. */
export function rehearseCase(given: Case, seed: string, samples = given.samples): CaseRow {
  const { name, leastLead, horizon, regime, regimeChannel } = given;
  const series = given.record(`${name} ${seed}`, samples);
  const request = RehearsalRequest.parse({
    recordings: [seed],
    channels: [series[0]!.channel],
    regime,
    regimeChannel: regimeChannel ?? null,
    leastLead,
    horizon,
  });
  const result = runRehearsal({
    request,
    recordings: [{ name: seed, sha256: seed, series, leftOut: [] }],
    program: 'evidence',
    at: '2026-01-01T00:00:00Z',
    interval: given.interval,
  });
  return { seed, result };
}

/** Its rows as lines of text, with what the case is above them. */
export function caseLines(given: Case, rows: readonly CaseRow[]): string[] {
  const { name, words, regime, interval, leastLead, horizon } = given;
  return [
    `${name}: ${words} (${regime}); interval ${interval}, least lead ${leastLead}, horizon ${horizon}`,
    'seed     watched        window rank  switches detection came true   lead  share | forcing  best baseline                    | verdict',
    ...rows.map(rowLine),
    `mean skill share ${number(meanShare(rows), 3, 0)}`,
    '',
  ];
}

/** Mean skill share over rows. */
export const meanShare = (rows: readonly CaseRow[]) =>
  rows.reduce((sum, { result }) => sum + (result.score.skillShare ?? Number.NaN), 0) / rows.length;

const number = (value: number | null | undefined, digits: number, width: number) =>
  (value == null ? '–' : value.toFixed(digits)).padStart(width);

/** The best of what was judged beside the chosen one, the forcing left out; shares are of the perfect warner's skill. */
function rowLine({ seed, result }: CaseRow): string {
  const { score, settings, contenders, verdict } = result;
  const perfect = score.skillShare === null || score.skill === null ? null : score.skill / score.skillShare;
  const share = (skill: number | null | undefined) =>
    skill == null || perfect === null ? null : skill / perfect;
  const forcing = contenders.find((one) => one.name === 'forcing');
  const [best] = contenders
    .slice(1)
    .filter((one) => one.name !== 'forcing' && one.skill !== null)
    .sort((a, b) => b.skill! - a.skill!);
  return [
    seed.padEnd(8),
    contenders[0]!.name.padEnd(14),
    number(settings.window, 2, 6),
    String(settings.rank).padStart(4),
    String(score.switches.total).padStart(9),
    number(score.detection.value, 3, 9),
    number(score.cameTrue.value, 3, 9),
    number(score.lead.median, 2, 6),
    number(score.skillShare, 3, 6),
    '|',
    number(share(forcing?.skill), 3, 7),
    ` ${number(share(best?.skill), 3, 5)} ${(best?.name ?? '–').padEnd(26)}`,
    `| ${verdict.kind}${verdict.than === null ? '' : ` ${verdict.than}`}`,
  ].join(' ');
}
