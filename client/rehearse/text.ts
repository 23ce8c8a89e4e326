import type {
  ChosenSettings,
  OperatingRow,
  RehearsalRequest,
  RehearsalResult,
  RulePreview,
  VerdictKind,
} from '../../shared-types/rehearsal.ts';
import type { Interval, Score } from '../../shared-types/score.ts';
import { thresholdText } from '../warningWords.ts';
import { capital, clockText, counted, minuteText, numberText, plural, spanText } from '../words.ts';

/** A stored recording as `GET /api/recordings` lists it. */
export interface RecordingName {
  /** `CHANNEL/N` */
  name: string;
  channel: string;
  from: number;
  to: number;
  samples: number;
}

/** "3 March 11:20 to 12:28, 1 h 08 min, 4080 samples". */
export function recordingText({ from, to, samples }: RecordingName, today: number): string {
  const end =
    Math.floor(from / 86400) === Math.floor(to / 86400) || from < 1e8 ? endText(to) : minuteText(to, today);
  return `${minuteText(from, today)} to ${end}, ${spanText(to - from)}, ${groups(samples)} samples`;
}

const endText = (time: number): string => (time < 1e8 ? clockText(time) : clockText(time).slice(0, 5));

/** A count with thin blanks between thousands. */
export function groups(count: number): string {
  return String(Math.round(count)).replace(/\B(?=(\d{3})+$)/g, '\u202f');
}

/** A number with about three figures: "0.8", "12.3", "128". */
export function short(value: number): string {
  if (value === 0) return '0';
  const size = Math.abs(value);
  if (size >= 100) return numberText(value, 0);
  if (size < 1e-4) return String(Number(value.toPrecision(2))).replace('-', '−');
  return String(Number(value.toPrecision(3))).replace('-', '−');
}

/** What a rule finds, as a sentence: "154 reversals, 61 an hour; 52 % of the time below, 48 % above." */
export function previewText(previews: readonly RulePreview[], hours: number, word: string): string {
  const count = previews.reduce((sum, { switches }) => sum + switches.length, 0);
  if (count === 0)
    return `No ${word} with this rule: choose levels that the signal passes, or longer recordings.`;
  const rate = hours > 0 ? `, ${short(count / hours)} an hour` : '';
  const bands = Math.max(...previews.map(({ shares }) => shares.length));
  const shares = Array.from({ length: bands }, (_, band) => {
    const sum = previews.reduce((total, each) => total + (each.shares[band] ?? 0), 0);
    return Math.round((100 * sum) / previews.length);
  });
  const parts = shares.map((share, band) => `${share} % ${bandWord(band, bands, word)}`);
  return `${counted(count, word)}${rate}; of the time ${parts.join(', ')}.`;
}

function bandWord(band: number, bands: number, word: string): string {
  if (word === 'excursion' || word === 'dip' || word === 'burst')
    return band === 0 ? 'quiet' : `in ${plural(word)}`;
  if (bands === 2) return band === 0 ? 'on the low side' : 'on the high side';
  return `in band ${band + 1}`;
}

/** "forcing above 1.7 sd", "level below 2.1 K". */
export function whereText(
  { variable, direction }: Pick<ChosenSettings, 'variable' | 'direction'>,
  threshold: number,
  unit: string,
): string {
  const side = direction === 'falling' ? 'below' : 'above';
  return `${variable} ${side} ${thresholdText(threshold, variable, unit)}`;
}

/** What a threshold does, as a sentence: "Forcing above 2 sd: 38 of 43 reversals warned, 0.4 false warnings an hour, median lead 1.1 s." */
export function rowSentence(
  settings: Pick<ChosenSettings, 'variable' | 'direction'>,
  { threshold, score }: Pick<OperatingRow, 'threshold' | 'score'>,
  word: string,
  unit: string,
): string {
  const total = judgedOf(score);
  const parts = [`${score.switches.warned} of ${counted(total, word)} warned`];
  if (score.falsePerHour.value !== null) parts.push(falseText(score.falsePerHour.value));
  if (score.lead.median !== null)
    parts.push(`median lead ${spanText(Number(score.lead.median.toPrecision(3)))}`);
  return `${capital(whereText(settings, threshold, unit))}: ${parts.join(', ')}.`;
}

/** "0.8 false warnings an hour". */
export function falseText(falsePerHour: number): string {
  if (falsePerHour === 0) return 'no false warning';
  return `${short(falsePerHour)} false ${falsePerHour === 1 ? 'warning' : 'warnings'} an hour`;
}

/** Judged switches that could have been warned of. */
export function judgedOf({ switches }: Score): number {
  return switches.warned + switches.late + switches.missed;
}

/** One figure of a score: its name, its value, and how sure it is. */
export interface Figure {
  name: string;
  value: string;
  sure: string;
}

/** The figures of a score in the order they are read. */
export function figuresOf(score: Score, word: string): Figure[] {
  const { switches, warnings, lead } = score;
  const total = judgedOf(score);
  const judged = warnings.true + warnings.late + warnings.false;
  const events = plural(word);
  return [
    {
      name: `${capital(events)} warned`,
      value: `${switches.warned} of ${total}`,
      sure: shareInterval(score.detection),
    },
    { name: 'warned too late', value: String(switches.late), sure: '' },
    {
      name: 'missed',
      value: String(switches.missed),
      sure: switches.blind > 0 ? `and ${switches.blind} while the window was not full` : '',
    },
    {
      name: 'Warnings that came true',
      value: `${warnings.true} of ${judged}`,
      sure: shareInterval(score.cameTrue),
    },
    {
      name: 'False warnings an hour',
      value: score.falsePerHour.value === null ? '–' : short(score.falsePerHour.value),
      sure: rateInterval(score.falsePerHour),
    },
    {
      name: 'Median lead',
      value: lead.median === null ? '–' : spanText(Number(lead.median.toPrecision(3))),
      sure:
        lead.p10 === null || lead.p90 === null
          ? ''
          : `8 of 10 between ${spanText(Number(lead.p10.toPrecision(3)))} and ${spanText(Number(lead.p90.toPrecision(3)))}`,
    },
    {
      name: 'Skill',
      value: score.skill === null ? '–' : numberText(score.skill, 2),
      sure: skillWords(score),
    },
  ];
}

function skillWords({ skillShare, pValue }: Score): string {
  const parts: string[] = [];
  if (skillShare !== null) parts.push(`${Math.round(100 * skillShare)} % of the perfect warner’s`);
  if (pValue !== null) parts.push(`by chance in ${pValue < 0.01 ? short(pValue) : numberText(pValue, 2)}`);
  return parts.join(', ');
}

/** "95 % interval 85 to 99 %", '' where nothing was counted. */
export function shareInterval({ low, high }: Interval): string {
  if (low === null || high === null) return '';
  return `95 % interval ${Math.round(100 * low)} to ${Math.round(100 * high)} %`;
}

function rateInterval({ low, high }: Interval): string {
  return low === null || high === null ? '' : `95 % interval ${short(low)} to ${short(high)}`;
}

/** The verdict as a word or two, capital first, with the sign that doubles it. */
export function verdictWords(kind: VerdictKind, than: string | null): { sign: string; words: string } {
  switch (kind) {
    case 'useful':
      return { sign: '●', words: 'Useful' };
    case 'weak':
      return { sign: '◐', words: 'Weak' };
    case 'no better than':
      return { sign: '=', words: `No better than ${than ?? 'a baseline'}` };
    case 'no skill':
      return { sign: '○', words: 'No skill' };
    case 'too few events':
      return { sign: '…', words: 'Too few events' };
  }
}

/** What a rehearsal was asked, in one line. */
export function requestText(request: RehearsalRequest): string {
  const { ceiling } = request;
  const limits = [
    ...(ceiling.falsePerHour === null ? [] : [`at most ${falseText(ceiling.falsePerHour)}`]),
    ...(ceiling.cameTrue === null
      ? []
      : [`at least ${Math.round(100 * ceiling.cameTrue)} of 100 coming true`]),
  ];
  return [
    request.channels.join(', '),
    request.recordings.length === 1
      ? request.recordings[0]!.replace(/^stored:/, '')
      : `${request.recordings.length} recordings`,
    `${request.regime}${request.regimeChannel === null ? '' : ` on ${request.regimeChannel}`}`,
    `least lead ${spanText(request.leastLead)}`,
    `horizon ${spanText(request.horizon)}`,
    limits.length === 0 ? 'no ceiling' : limits.join(' and '),
  ].join(' · ');
}

/** "about 40 s left", '' while it is not known. */
export function leftText(secondsLeft: number | null): string {
  return secondsLeft === null ? '' : `about ${spanText(Math.max(1, Math.round(secondsLeft)))} left`;
}

/** What was judged: "Judged on 52 min of 1 h 44 min; chosen on the part before." */
export function judgedText({ recordings }: Pick<RehearsalResult, 'recordings'>): string {
  const whole = recordings.reduce((sum, { from, to }) => sum + to - from, 0);
  const judged = recordings.reduce(
    (sum, { from, to, judgedFrom }) => sum + to - Math.max(from, judgedFrom),
    0,
  );
  return `Chosen on the first ${spanText(whole - judged)}, judged on the ${spanText(judged)} after.`;
}
