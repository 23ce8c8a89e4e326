import { createHash } from 'node:crypto';
import { mkdir, readFile, writeFile } from 'node:fs/promises';
import { join } from 'node:path';
import type { Model } from '../../shared-types/model.ts';
import { RehearsalRequest } from '../../shared-types/rehearsal.ts';
import type { NewWatchToSend } from '../../shared-types/watch.ts';
import { modelFromJson, modelToJson } from '../model/modelFile.ts';
import { writeCsv } from '../recordings/csv.ts';
import { chooseSettings } from '../rehearsal/chooseSettings.ts';
import type { RecordedSeries } from '../rehearsal/playback.ts';

import { createStand, STAND_INTERVAL, STAND_LOOPS } from '../rigs/stand.ts';
import { programName } from './program.ts';

/** Hours of training recording: the first half for choosing, the second judged. */
const TRAINING_HOURS = 6;

/** A person must be able to act: ten seconds at least. */
const LEAST_LEAD = 10;
const HORIZON = 20;

/** The reaction, in seconds, up to which a person is asked to acknowledge: well below the least lead. */
const REACTION = 5;

/** Windows (in samples) and ranks that are tried: about an orbit's third to its whole. */
const DELAYS = [14, 17, 20, 23, 26, 30, 34];
const RANKS = [2, 3];

/** A switch is a change of sides by a tenth of the amplitude, about 0.3 K. */
const SIDE_KELVIN = 0.3;

/** What the watch command needs to start the demo's watches. */
export interface PreparedDemo {
  /** one a loop, to be saved under `name` */
  models: { name: string; json: string; model: Model; file: string }[];
  watches: NewWatchToSend[];
  /** the training recordings, to look at and to fit again */
  recordings: string[];
}

/**
 * Makes what the demo needs in `DATA/demo`: a training recording of each loop (CSV, simulated at once), settings
 * chosen on its first half, and a model with its rules and the score of the second half. What an earlier start made is
 * used again.
 */
export async function prepareDemo(dataFolder: string): Promise<PreparedDemo> {
  const folder = join(dataFolder, 'demo');
  await mkdir(folder, { recursive: true });
  const prepared: PreparedDemo = { models: [], watches: [], recordings: [] };
  for (const { channel } of STAND_LOOPS) {
    const recording = join(folder, `${fileName(channel)}.csv`);
    const file = join(folder, `${fileName(channel)}.model.json`);
    const json = (await earlier(file, recording)) ?? (await makeModel(channel, recording, file));
    const name = `demo ${channel}`;
    prepared.models.push({ name, json, model: modelFromJson(json), file });
    prepared.watches.push({ name: channel, model: name, channels: [channel], reaction: REACTION });
    prepared.recordings.push(recording);
  }
  return prepared;
}

const fileName = (channel: string): string => channel.toLowerCase().replaceAll(' ', '-');

/** The model of an earlier start, null when there is none that can be used. */
async function earlier(file: string, recording: string): Promise<string | null> {
  try {
    await readFile(recording);
    const json = await readFile(file, 'utf8');
    modelFromJson(json);
    return json;
  } catch {
    return null;
  }
}

async function makeModel(channel: string, recording: string, file: string): Promise<string> {
  const series = trainingSeries(channel);
  const text = writeCsv({ name: recording, channels: [{ ...series, unit: 'K' }], sha256: '' });
  await writeFile(recording, text);
  const sha256 = createHash('sha256').update(text).digest('hex');
  const json = modelToJson(fitDemo(series, { name: recording, sha256 }));
  await writeFile(file, json);
  return json;
}

/** A simulated recording as its file will hold it: milliseconds and tenths of a millikelvin. */
export function trainingSeries(channel: string, hours = TRAINING_HOURS): RecordedSeries {
  const designs = STAND_LOOPS.filter((design) => design.channel === channel);
  const [frame] = createStand('training', designs).advance(3600 * hours);
  const rounded = (values: Float64Array, digits: number) =>
    values.map((value) => Number(value.toFixed(digits)));
  return { channel, times: rounded(frame!.times, 3), values: rounded(frame!.values, 4) };
}

/** Chooses settings on the first half of a training recording and fits with them; scored on the second half. */
export function fitDemo(series: RecordedSeries, source = { name: series.channel, sha256: '' }): Model {
  const { channel } = series;
  const model = chooseSettings({
    request: RehearsalRequest.parse({
      recordings: [source.name],
      channels: [channel],
      regime: `sides:${-SIDE_KELVIN},${SIDE_KELVIN}`,
      leastLead: LEAST_LEAD,
      horizon: HORIZON,
      variable: 'forcing',
      windows: DELAYS.map((delays) => delays * STAND_INTERVAL),
      ranks: RANKS,
      onDelay: 0,
      holdOff: HORIZON - LEAST_LEAD,
    }),
    recordings: [{ ...source, series: [{ ...series, unit: 'K' }], leftOut: [] }],
    program: programName(),
    at: new Date().toISOString(),
    interval: STAND_INTERVAL,
  });
  return { ...model, name: `demo ${channel}` };
}
