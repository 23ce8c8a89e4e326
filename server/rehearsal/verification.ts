import { incompleteBeta } from './beta.ts';

/** Yes-or-no forecasts of yes-or-no events, counted. */
export interface ContingencyTable {
  hits: number;
  falseAlarms: number;
  misses: number;
  correctNegatives: number;
}

/** Scores of a contingency table; NaN where one is not defined. */
export type ContingencyScores = ReturnType<typeof contingencyScores>;

/**
 * The usual scores of a contingency table with a hits, b false alarms, c misses, d correct negatives, n of all,
 * H = a/(a + c), F = b/(b + d).
 *
 * @see Murphy 1996, Weather and Forecasting 11, p. 3 (the older ones)
 * @see Stephenson 2000, Weather and Forecasting 15, p. 221 (odds ratio, ORSS)
 * @see Ferro, Stephenson 2011, Weather and Forecasting 26, p. 699 (EDS to SEDI)
 */
export function contingencyScores({ hits, falseAlarms, misses, correctNegatives }: ContingencyTable) {
  const a = hits;
  const b = falseAlarms;
  const c = misses;
  const d = correctNegatives;
  const n = a + b + c + d;
  const detection = a / (a + c);
  const falseAlarmRate = b / (b + d);
  const randomHits = ((a + b) * (a + c)) / n;
  const [logH, logF] = [Math.log(detection), Math.log(falseAlarmRate)];
  const [logRestH, logRestF] = [Math.log1p(-detection), Math.log1p(-falseAlarmRate)];
  return {
    accuracy: (a + d) / n,
    /** of never forecasting the event */
    neverAccuracy: (b + d) / n,
    baseRate: (a + c) / n,
    bias: (a + b) / (a + c),
    detection,
    falseAlarmRate,
    falseAlarmRatio: b / (a + b),
    successRatio: a / (a + b),
    /** CSI, threat score */
    criticalSuccess: a / (a + b + c),
    randomHits,
    /** ETS, Gilbert */
    equitableThreat: (a - randomHits) / (a + b + c - randomHits),
    /** PSS, Hanssen–Kuipers, TSS: height above the diagonal of the ROC diagram */
    peirce: detection - falseAlarmRate,
    /** of the Peirce score, both shares taken as independent binomials */
    peirceError: Math.sqrt(
      (detection * (1 - detection)) / (a + c) + (falseAlarmRate * (1 - falseAlarmRate)) / (b + d),
    ),
    heidke: (2 * (a * d - b * c)) / ((a + c) * (c + d) + (a + b) * (b + d)),
    clayton: a / (a + b) - c / (c + d),
    oddsRatio: (a * d) / (b * c),
    logOddsRatio: Math.log((a * d) / (b * c)),
    logOddsRatioError: Math.sqrt(1 / a + 1 / b + 1 / c + 1 / d),
    /** ORSS, Yule's Q */
    oddsRatioSkill: (a * d - b * c) / (a * d + b * c),
    extremeDependency: (2 * Math.log((a + c) / n)) / Math.log(a / n) - 1,
    symmetricExtremeDependency: Math.log(randomHits / a) / Math.log(a / n),
    extremalDependence: (logF - logH) / (logF + logH),
    symmetricExtremalDependence: (logF - logH - logRestF + logRestH) / (logF + logH + logRestF + logRestH),
    f1: (2 * a) / (2 * a + b + c),
    matthews: (a * d - b * c) / Math.sqrt((a + b) * (a + c) * (b + d) * (c + d)),
  };
}

/** Forecasts of one chance: how large a share of all they are, and in which share of them the event came. */
export interface ForecastBin {
  forecast: number;
  share: number;
  observed: number;
}

/**
 * Bins of equal forecasts, ascending.
 *
 * @param forecasts chances, 0..1
 * @param happened  1 or 0 for each
 */
export function forecastBins(forecasts: ArrayLike<number>, happened: ArrayLike<number>): ForecastBin[] {
  const counts = new Map<number, { all: number; came: number }>();
  for (let i = 0; i < forecasts.length; i++) {
    const bin = counts.get(forecasts[i]!) ?? { all: 0, came: 0 };
    bin.all++;
    bin.came += happened[i]!;
    counts.set(forecasts[i]!, bin);
  }
  return [...counts]
    .sort(([p], [q]) => p - q)
    .map(([forecast, { all, came }]) => ({ forecast, share: all / forecasts.length, observed: came / all }));
}

/**
 * The Brier score and what it is made of: score = reliability − resolution + uncertainty, exact where a bin holds equal
 * forecasts; skill = (resolution − reliability)/uncertainty.
 *
 * @param bins their shares sum to 1
 * @see Brier 1950, Monthly Weather Review 78, p. 1
 * @see Murphy 1973, Journal of Applied Meteorology 12, p. 595
 */
export function brierDecomposition(bins: readonly ForecastBin[]) {
  const baseRate = bins.reduce((sum, { share, observed }) => sum + share * observed, 0);
  let score = 0;
  let reliability = 0;
  let resolution = 0;
  for (const { forecast, share, observed } of bins) {
    score += share * (observed * (1 - forecast) ** 2 + (1 - observed) * forecast ** 2);
    reliability += share * (forecast - observed) ** 2;
    resolution += share * (observed - baseRate) ** 2;
  }
  const uncertainty = baseRate * (1 - baseRate);
  return { score, reliability, resolution, uncertainty, skill: 1 - score / uncertainty };
}

/** How many events and how many others were given one rating. */
export interface Rating {
  events: number;
  others: number;
}

/** Ratings counted: one entry a distinct value, lowest first; `happened` is 1 or 0 for each value. */
export function ratingsOf(values: ArrayLike<number>, happened: ArrayLike<number>): Rating[] {
  const counts = new Map<number, Rating>();
  for (let i = 0; i < values.length; i++) {
    const rating = counts.get(values[i]!) ?? { events: 0, others: 0 };
    rating.events += happened[i]!;
    rating.others += 1 - happened[i]!;
    counts.set(values[i]!, rating);
  }
  return [...counts].sort(([p], [q]) => p - q).map(([, rating]) => rating);
}

/**
 * The area below the ROC curve: the chance that an event was rated above another case, a tie counting half (the
 * statistic of Mann and Whitney over the number of pairs), with its standard error from the data and by the
 * approximation with exponentially distributed ratings; and the curve's points, strictest first, ends included.
 *
 * @param ratings lowest first; at least one event and one other
 * @see Hanley, McNeil 1982, Radiology 143, p. 29
 */
export function rocArea(ratings: readonly Rating[]) {
  const events = ratings.reduce((sum, one) => sum + one.events, 0);
  const others = ratings.reduce((sum, one) => sum + one.others, 0);
  const points = [{ falseAlarmRate: 0, detection: 0 }];
  let above = 0;
  let othersAbove = 0;
  let wins = 0;
  /** chance that two events are both rated above one other, and one event above two others */
  let twoEvents = 0;
  let twoOthers = 0;
  for (const rating of [...ratings].reverse()) {
    const below = others - othersAbove - rating.others;
    wins += rating.events * (below + rating.others / 2);
    twoEvents += rating.others * (above ** 2 + above * rating.events + rating.events ** 2 / 3);
    twoOthers += rating.events * (below ** 2 + below * rating.others + rating.others ** 2 / 3);
    above += rating.events;
    othersAbove += rating.others;
    points.push({ falseAlarmRate: othersAbove / others, detection: above / events });
  }
  const area = wins / (events * others);
  const error = (q1: number, q2: number) =>
    Math.sqrt(
      (area * (1 - area) + (events - 1) * (q1 - area * area) + (others - 1) * (q2 - area * area)) /
        (events * others),
    );
  return {
    area,
    wins,
    error: error(twoEvents / (others * events ** 2), twoOthers / (events * others ** 2)),
    exponentialError: error(area / (2 - area), (2 * area * area) / (1 + area)),
    points,
  };
}

/**
 * The chance that a warner that knows nothing, in alarm for the share τ of the time, catches at least `warned` of the
 * events: Σ C(N, i) τⁱ (1 − τ)^(N−i) from `warned` to N.
 *
 * @see Molchan 1991, Tectonophysics 193, p. 267
 * @see Zechar, Jordan 2008, Geophysical Journal International 172, p. 715
 */
export function molchanSignificance(warned: number, events: number, tau: number): number {
  return warned === 0 ? 1 : incompleteBeta(warned, events - warned + 1, tau);
}
