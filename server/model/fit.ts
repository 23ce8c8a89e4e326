import type { Model } from '../../shared-types/model.ts';
import { type HankelVectors, hankelVectors } from '../embedding/hankelVectors.ts';
import { chooseRank, type RankChoice } from '../embedding/rankChoice.ts';
import { countWindows, type Runs } from '../embedding/runs.ts';
import { chooseDelays, type WindowChoice } from '../embedding/windowChoice.ts';
import { InputError } from '../signal/inputError.ts';
import { addToMoments, createMoments, deviationOf, meanOf } from '../signal/statistics.ts';
import type { Coordinates } from './coordinateBlocks.ts';
import { antisymmetryDefect, eigenvaluesOf, measureSpread, regress } from './diagnostics.ts';
import { createValidity } from './validity.ts';

/** What may be chosen for a fit; null: chosen from the data. */
export interface FitOptions {
  name: string;
  channels: { channel: string; unit: string }[];
  delays: number | null;
  rank: number | null;
  center: 'mean' | 'none';
  gapIntervals: number;
}

/** Rows of the Hankel matrix above which its factorisation would take minutes. */
const MOST_ROWS = 2048;
/** Delays that are chosen by themselves, at most: a longer window must be asked for. */
const MOST_CHOSEN_ROWS = 512;
/** s_k/s_1 below which double precision holds nothing of a direction. */
const NOTHING = 1e-15;
const FEWEST_SPARE_WINDOWS = 8;

/**
 * Fits a model to uniformly sampled runs: singular vectors of the centred Hankel matrix, delay coordinates of unit rms,
 * least squares of their derivative on themselves with the last one as forcing. Memory does not grow with the runs.
 *
 * Several channels are divided by their standard deviations before their Hankel matrices are stacked; one channel is
 * left in its unit. The rule, the regime, the score and the provenance are left empty, `diagnostics.seconds` zero: who
 * calls knows the clock and the files.
 *
 * @param runs     runs[i][c]: samples of channel c in run i, one every `interval` seconds; windows never cross runs;
 *                 each channel of a run has the same length; nothing is changed
 * @param interval seconds
 * @throws InputError with code NO_SAMPLES, NOT_FINITE, CONSTANT, TOO_SHORT, BAD_INTERVAL, BAD_DELAYS, BAD_RANK or
 *         RANK_TOO_HIGH
 * @see Brunton, Brunton, Proctor, Kaiser and Kutz 2017, Nature Communications 8:19
 */
export function fitModel(
  runs: readonly (readonly Float64Array[])[],
  interval: number,
  options: FitOptions,
): Model {
  if (!(interval > 0) || !Number.isFinite(interval)) {
    throw new InputError(
      'BAD_INTERVAL',
      `the interval is ${interval} s, expected a positive number of seconds; give it with --interval`,
    );
  }
  const channels = describeChannels(runs, options);
  const window = chosenWindow(runs, channels.length, options.delays);
  const { delays } = window;
  const samples = runs.reduce((sum, run) => sum + run[0]!.length, 0);
  const stacked: Runs = {
    samples: runs,
    means: Float64Array.from(channels, ({ mean }) => mean),
    weights: Float64Array.from(channels, ({ scale }) => (channels.length === 1 ? 1 : 1 / scale)),
  };
  const windows = countWindows(stacked, delays);
  checkLength(samples, windows, delays, channels.length, options.rank);
  let choice: RankChoice = { rank: 0, words: '' };
  const found = hankelVectors(stacked, delays, (singularValues, columns) => {
    choice = chosenRank(singularValues, columns, options.rank);
    return choice.rank;
  });
  const { rank } = choice;
  checkDepth(found.singularValues, rank);
  const coordinates: Coordinates = {
    channels,
    delays,
    rank,
    coordinates: scaledVectors(found, rank, delays, stacked.weights),
  };
  const singularValues = found.singularValues.slice(0, rank);
  const { A, B, r2, heldOut } = regress(runs, coordinates, interval, windows);
  const validity = createValidity({ channels, delays, rank, singularValues }, windows);
  const unit = channels.length === 1 ? 1 / channels[0]!.scale ** 2 : 1;
  const left = found.singularValues.subarray(rank).map((s) => ((s * s) / windows) * unit);
  const spread = measureSpread(runs, coordinates, windows, validity, left);
  return {
    name: options.name,
    interval,
    delays,
    rank,
    channels,
    center: options.center,
    coordinates: coordinates.coordinates,
    singularValues,
    spectrum: found.singularValues,
    A,
    B,
    diagnostics: {
      r2,
      forcing: spread.forcing,
      antisymmetryDefect: antisymmetryDefect(A, rank - 1),
      eigenvalues: eigenvaluesOf(A, rank - 1),
      heldOut,
      method: found.method,
      rankChoice: choice.words,
      windowChoice: window.words,
      samples,
      windows,
      seconds: 0,
    },
    gapIntervals: options.gapIntervals,
    rule: null,
    regime: null,
    regimeChannel: null,
    switchWord: 'switch',
    validity: spread.validity,
    score: null,
    provenance: { recordings: [], program: '', fittedAt: '' },
  };
}

function describeChannels(
  runs: readonly (readonly Float64Array[])[],
  options: FitOptions,
): Model['channels'] {
  if (runs.length === 0 || runs.every((run) => run[0]!.length === 0)) {
    throw new InputError(
      'NO_SAMPLES',
      'there is not one sample to fit, expected a recording; check --channel, --from and --to',
    );
  }
  return options.channels.map(({ channel, unit }, c) => {
    const moments = createMoments();
    for (const run of runs) {
      const values = run[c]!;
      for (let i = 0; i < values.length; i++) {
        if (!Number.isFinite(values[i]!)) {
          throw new InputError(
            'NOT_FINITE',
            `channel "${channel}" has the value ${values[i]} at sample ${i} of a run, expected finite numbers; cut the run there or mend the recording`,
          );
        }
        addToMoments(moments, values[i]!);
      }
    }
    const mean = meanOf(moments);
    const scale = deviationOf(moments);
    // a spread of a few units in the last place is no signal
    if (!(scale > 4 * Number.EPSILON * Math.abs(mean))) {
      throw new InputError(
        'CONSTANT',
        `channel "${channel}" is ${mean} throughout, expected a signal that moves; check the sensor or choose another --channel or --from/--to`,
      );
    }
    return { channel, unit, mean: options.center === 'mean' ? mean : 0, scale };
  });
}

function chosenWindow(
  runs: readonly (readonly Float64Array[])[],
  channels: number,
  asked: number | null,
): WindowChoice {
  const most = Math.floor(MOST_ROWS / channels);
  if (asked === null) {
    // the slowest channel sets the window
    const choices = Array.from({ length: channels }, (_, c) => chooseDelays(runs.map((run) => run[c]!)));
    const longest = choices.reduce((a, b) => (b.delays > a.delays ? b : a));
    const limit = Math.floor(MOST_CHOSEN_ROWS / channels);
    if (longest.delays <= limit) return longest;
    return {
      delays: limit,
      words: `${longest.words}, cut to ${limit} delays; a longer interval would serve better`,
    };
  }
  if (!Number.isInteger(asked) || asked < 2 || asked > most) {
    throw new InputError(
      'BAD_DELAYS',
      `${asked} delays, expected a whole number from 2 to ${most}; change --delays or --window, or take a longer --interval`,
    );
  }
  return { delays: asked, words: 'as asked' };
}

function checkLength(
  samples: number,
  windows: number,
  delays: number,
  channels: number,
  rank: number | null,
): void {
  if (rank !== null && (!Number.isInteger(rank) || rank < 2 || rank > delays * channels)) {
    throw new InputError(
      'BAD_RANK',
      `rank ${rank}, expected a whole number from 2 to ${delays * channels} (delays × channels); change --rank or --delays`,
    );
  }
  const fewest = Math.max(delays * channels, (rank ?? 2) + FEWEST_SPARE_WINDOWS);
  if (windows < fewest) {
    throw new InputError(
      'TOO_SHORT',
      `${samples} samples hold ${windows} windows of ${delays} delays, expected at least ${fewest} windows, that is ${fewest + delays - 1} samples without a gap; record for longer or lower --delays`,
    );
  }
}

function chosenRank(singularValues: Float64Array, windows: number, asked: number | null): RankChoice {
  return asked === null ? chooseRank(singularValues, windows) : { rank: asked, words: 'as asked' };
}

function checkDepth(singularValues: Float64Array, rank: number): void {
  let carried = 0;
  while (carried < rank && singularValues[carried]! > NOTHING * singularValues[0]!) carried++;
  if (carried < rank) {
    throw new InputError(
      'RANK_TOO_HIGH',
      `rank ${rank}, but the recording carries only ${carried} directions above the rounding of its numbers; lower --rank to ${Math.max(2, carried)}`,
    );
  }
}

/** Model.coordinates: √windows/s_k times the k-th singular vector, and the channels' weights. */
function scaledVectors(
  { vectors, singularValues, rows, windows }: HankelVectors,
  rank: number,
  delays: number,
  weights: Float64Array,
): Float64Array {
  const out = new Float64Array(rows * rank);
  for (let k = 0; k < rank; k++) {
    const scale = Math.sqrt(windows) / singularValues[k]!;
    for (let row = 0; row < rows; row++) {
      out[row * rank + k] = scale * vectors[k * rows + row]! * weights[Math.floor(row / delays)]!;
    }
  }
  return out;
}
