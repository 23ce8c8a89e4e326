import { counted, spanText } from '../words.ts';
import { type Beyond, type Figures, STANDARD } from './figures.ts';

/** A figure beside what the standards call acceptable. */
export interface Fact {
  name: string;
  figure: string;
  standard: string;
  /** the figure is beyond what the standards call acceptable: it needs a person */
  beyond: boolean;
}

const rate = (value: number) => (value >= 10 ? value.toFixed(0) : String(Number(value.toPrecision(2))));

/** How often somebody was called, and what the standards say to that, in sentences. */
export function callSentences(figures: Figures): string[] {
  const { called, uncalled, seconds, perTenMinutes, perHour } = figures;
  const rates = [
    perTenMinutes === null ? null : `${rate(perTenMinutes)} per 10 minutes`,
    perHour === null ? null : `${rate(perHour)} an hour`,
  ].filter((text) => text !== null);
  const often =
    called === 0 ? 'Nobody was called' : `Somebody was called ${called === 1 ? 'once' : `${called} times`}`;
  const sentences = [
    `${often} in ${spanText(seconds)}${called > 0 && rates.length > 0 ? `: ${rates.join(', ')}` : ''}.`,
  ];
  if (uncalled > 0) sentences.push(`${counted(uncalled, 'more warning')} called nobody.`);
  sentences.push(ratingSentence(figures));
  const short = shortSentence(figures);
  if (short !== null) sentences.push(short);
  if (figures.cut)
    sentences.push('Older warnings of the last 30 days are left out: there are too many to count here.');
  return sentences;
}

function ratingSentence({ perTenMinutes }: Figures): string {
  const { acceptable, manageable } = STANDARD;
  const scale =
    `about ${acceptable.perTenMinutes} per 10 minutes (${acceptable.perHour} an hour) is called very likely acceptable, ` +
    `about ${manageable.perTenMinutes} (${manageable.perHour} an hour) the most that one person can manage`;
  switch (ratingOf(perTenMinutes)) {
    case null:
      return `For comparison: ${scale}.`;
    case 'acceptable':
      return `That is very likely acceptable: ${scale}.`;
    case 'manageable':
      return `That is more than is very likely acceptable, and can be managed: ${scale}.`;
    case 'too many':
      return `That is more than one person can be expected to manage: ${scale}.`;
  }
}

/** What the standards say to an average per 10 minutes; null: too short to say. */
export function ratingOf(perTenMinutes: number | null): 'acceptable' | 'manageable' | 'too many' | null {
  if (perTenMinutes === null) return null;
  if (perTenMinutes <= STANDARD.acceptable.perTenMinutes) return 'acceptable';
  return perTenMinutes <= STANDARD.manageable.perTenMinutes ? 'manageable' : 'too many';
}

/** That the stretch is shorter than what the standards' figures are meant for; null when it is not. */
export function shortSentence({ seconds }: Figures): string | null {
  // a minute short of 30 days is 30 days
  if (seconds >= STANDARD.days * 86400 - 60) return null;
  return `These are figures of ${spanText(seconds)}; the standards speak of at least ${STANDARD.days} days.`;
}

/** The figures one by one, with what the standards call acceptable. @param shelved watches on the shelf now */
export function factsOf(figures: Figures, shelved: number, nameOf: (watch: string) => string): Fact[] {
  const { mostInTenMinutes, periods, periodsByOther, hours, flood, chattering, stale, forgotten } = figures;
  const most = STANDARD.mostInTenMinutes;
  return [
    {
      name: 'Most in any 10 minutes',
      figure: String(mostInTenMinutes),
      standard: `${most} at most`,
      beyond: mostInTenMinutes > most,
    },
    {
      name: `10-minute periods with more than ${most}`,
      figure: ofText(periods),
      standard: `below about 1 %; one summary counts those with more than ${STANDARD.otherMostInTenMinutes} (here ${ofText(periodsByOther)})`,
      beyond: tooMany(periods),
    },
    {
      name: `Hours with more than ${STANDARD.mostInHour}`,
      figure: ofText(hours),
      standard: 'below about 1 %',
      beyond: tooMany(hours),
    },
    {
      name: 'Time in flood',
      figure: flood === null ? 'too short to say' : percent(flood),
      standard: `below about 1 %; a flood begins above ${STANDARD.flood.above} in 10 minutes and ends below ${STANDARD.flood.below}`,
      beyond: flood !== null && flood > STANDARD.share,
    },
    {
      name: 'Chattering',
      figure:
        chattering.length === 0
          ? 'none'
          : chattering.map(({ watch, times }) => `${nameOf(watch)} (${counted(times, 'time')})`).join(', '),
      standard: 'none; commonly three within a minute',
      beyond: chattering.length > 0,
    },
    {
      name: 'Stale',
      figure: stale === 0 ? 'none' : String(stale),
      standard: `fewer than ${STANDARD.stale.fewerThan} on any day; standing longer than 24 h`,
      beyond: stale >= STANDARD.stale.fewerThan,
    },
    {
      name: 'Unacknowledged for more than 24 h',
      figure: forgotten === 0 ? 'none' : String(forgotten),
      standard: 'no figure; somebody should look',
      beyond: forgotten > 0,
    },
    {
      name: 'Shelved now',
      figure: shelved === 0 ? 'none' : String(shelved),
      standard: `fewer than ${STANDARD.shelvedFewerThan} (EEMUA 191, one summary only)`,
      beyond: shelved >= STANDARD.shelvedFewerThan,
    },
  ];
}

const ofText = ({ of, beyond }: Beyond) => (of === 0 ? 'too short to say' : `${beyond} of ${of}`);
const tooMany = ({ of, beyond }: Beyond) => of > 0 && beyond / of > STANDARD.share;
const percent = (share: number) =>
  share === 0 ? '0 %' : share < 0.001 ? 'below 0.1 %' : `${Number((100 * share).toPrecision(2))} %`;

/** Where the standards' figures come from, and where sources differ. */
export const SOURCES =
  'After ANSI/ISA-18.2-2016, IEC 62682:2014 and EEMUA Publication 191 (3rd edition, 2013), as several independent public ' +
  'summaries give them; the standards themselves were not read. Sources differ: for a day about 150 or about 144 calls ' +
  'are printed as acceptable (about 300 or 288 as manageable); the 2009 edition of ISA-18.2 has rates by the day, that ' +
  'of 2016 reportedly only by the hour and by 10 minutes; and one summary prints 5 in place of 10 for the periods above. ' +
  'Check a copy before you rely on one of them.';
