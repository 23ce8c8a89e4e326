import type { ChannelState } from '../shared-types/channel.ts';
import type { Interval } from '../shared-types/score.ts';
import type { AlarmState, Likeness, Sight, WatchState } from '../shared-types/watch.ts';

const MINUS = '−';
const DASH = '–';
/** Times below this (s) are elapsed time, not Unix time. */
const UNIX_FROM = 1e8;

/** A number with a true minus sign and fixed decimals; `plus`: positive ones carry their sign as well. */
export function numberText(value: number, decimals: number, plus = false): string {
  const digits = Math.abs(value).toFixed(decimals);
  const zero = Number(digits) === 0;
  return (zero ? '' : value < 0 ? MINUS : plus ? '+' : '') + digits;
}

/** Decimals that resolve about a hundredth of a span of values. */
export function decimalsFor(span: number): number {
  if (!(span > 0) || !Number.isFinite(span)) return 2;
  return Math.min(6, Math.max(0, Math.ceil(2 - Math.log10(span))));
}

/** A span of time in words: "0.2 s", "16 s", "1 min 20 s", "2 h 05 min". */
export function spanText(seconds: number): string {
  const s = Math.max(0, seconds);
  if (s < 9.95) return `${Number.isInteger(s) ? s : s.toFixed(1)} s`;
  const whole = Math.round(s);
  if (whole < 120) return `${whole} s`;
  const minutes = Math.floor(whole / 60);
  if (minutes < 60) return whole % 60 === 0 ? `${minutes} min` : `${minutes} min ${whole % 60} s`;
  const hours = Math.floor(minutes / 60);
  return hours < 48 ? `${hours} h ${pad(minutes % 60)} min` : `${Math.floor(hours / 24)} d ${hours % 24} h`;
}

/**
 * A time of day in UTC, "14:32:07" (`decimals` adds tenths, hundredths …); elapsed time, below 1e8 s, as
 * "1:02:07 elapsed" so that nobody takes it for a time of day.
 */
export function clockText(time: number, decimals = 0): string {
  const scale = 10 ** decimals;
  const ticks = Math.floor(time * scale + 1e-6);
  const seconds = Math.floor(ticks / scale);
  const part = decimals > 0 ? `.${String(ticks - seconds * scale).padStart(decimals, '0')}` : '';
  const tail = `${pad(mod(Math.floor(seconds / 60), 60))}:${pad(mod(seconds, 60))}${part}`;
  if (time < UNIX_FROM) return `${Math.floor(seconds / 3600)}:${tail} elapsed`;
  return `${pad(mod(Math.floor(seconds / 3600), 24))}:${tail}`;
}

/** A time without seconds, with the day when it is another day than `today`: "11:20", "3 March 11:20". */
export function minuteText(time: number, today: number): string {
  if (time < UNIX_FROM) return clockText(time);
  const text = clockText(time).slice(0, 5);
  if (Math.floor(time / 86400) === Math.floor(today / 86400)) return text;
  const date = new Date(time * 1000);
  return `${date.getUTCDate()} ${MONTHS[date.getUTCMonth()]} ${text}`;
}

const MONTHS = 'January February March April May June July August September October November December'.split(
  ' ',
);

/** "97 of 100" for a share of 0.97; null where nothing was counted. */
export function shareText(share: Interval | null | undefined): string | null {
  return share?.value === null || share?.value === undefined
    ? null
    : `${Math.round(share.value * 100)} of 100`;
}

/** "95 % interval 92 to 99" of a share; null where nothing was counted. */
export function intervalText(share: Interval | null | undefined): string | null {
  if (share?.low === null || share?.low === undefined || share.high === null) return null;
  return `95 % interval ${Math.round(share.low * 100)} to ${Math.round(share.high * 100)}`;
}

/** "4 – 14 s": a span ahead in whole seconds, in tenths when it ends within 5 s, in minutes beyond three. */
export function aheadText(from: number, to: number): string {
  const near = Math.max(0, from);
  if (to >= 180) return `${numberText(near / 60, 1)} ${DASH} ${numberText(to / 60, 1)} min`;
  const decimals = to < 4.95 ? 1 : 0;
  return `${numberText(near, decimals)} ${DASH} ${numberText(to, decimals)} s`;
}

/** A word with a capital first letter. */
export function capital(word: string): string {
  return word.slice(0, 1).toUpperCase() + word.slice(1);
}

/** "1 reversal", "2 reversals". */
export function counted(count: number, word: string): string {
  return `${count} ${count === 1 ? word : plural(word)}`;
}

/** The plural of a regular English noun. */
export function plural(word: string): string {
  if (/(s|x|ch|sh)$/.test(word)) return `${word}es`;
  return /[^aeiou]y$/.test(word) ? `${word.slice(0, -1)}ies` : `${word}s`;
}

/** Whether the watch sees, in words; null when it does. */
export function sightText(sight: Sight): string | null {
  return sight.kind === 'blind' ? `blind: ${spanText(sight.left)} until the window is full` : null;
}

/** Why a watch does not count what comes now, in words; null when it does. */
export function leftOutText({ leftOut, waitsFor }: Pick<WatchState, 'leftOut' | 'waitsFor'>): string | null {
  if (waitsFor !== null) return `waiting for ${waitsFor}, which is silent: only it tells what counts`;
  return leftOut === null ? null : `left out: ${leftOut}`;
}

/** Whether the data look like those the model was fitted on. */
export function likenessText(likeness: Likeness, today: number): string {
  if (likeness.kind === 'like') return 'data like the training data';
  if (likeness.kind === 'unlike') return `data unlike the model since ${minuteText(likeness.since, today)}`;
  return 'likeness to the training data not known';
}

/** An alarm state as the badge shows it: its words in short, and the shape that doubles its colour. */
export function badgeOf(state: AlarmState): { mark: string; words: string; kind: string } {
  switch (state) {
    case 'unacknowledged':
      return { mark: '▲', words: 'unacknowledged', kind: 'unacknowledged' };
    case 'returned to normal, unacknowledged':
      return { mark: '△', words: 'returned to normal, unacknowledged', kind: 'returned' };
    case 'latched, unacknowledged':
      return { mark: '△', words: 'latched, unacknowledged', kind: 'returned' };
    case 'latched, acknowledged':
      return { mark: '✓', words: 'latched, acknowledged', kind: 'acknowledged' };
    case 'acknowledged':
      return { mark: '✓', words: 'acknowledged', kind: 'acknowledged' };
    case 'shelved':
      return { mark: '‖', words: 'shelved', kind: 'shelved' };
    case 'out of service':
      return { mark: '×', words: 'out of service', kind: 'out' };
    default:
      return { mark: '', words: state, kind: 'normal' };
  }
}

/** What is the matter with a channel, one remark each; empty when nothing is. */
export function channelRemarks(channel: ChannelState): string[] {
  const remarks: string[] = [];
  if (channel.newest === null) remarks.push('no sample yet');
  else if (channel.silent) remarks.push(`silent since ${clockText(channel.newest)}`);
  if (!channel.connected && channel.newest !== null && !channel.silent)
    remarks.push('its producer has hung up');
  if (channel.saturated >= 0.005) {
    remarks.push(
      `saturated: ${Math.max(1, Math.round(channel.saturated * 100))} of 100 samples at the sensor’s limit`,
    );
  }
  const offset = channel.clockOffset;
  if (offset !== null && Math.abs(offset) >= 1) {
    const by = spanText(Math.abs(offset));
    if (offset < 0) remarks.push(`its clock is ${by} ahead of the server’s`);
    // what comes late for a while is on its way; what stays late is a clock, or a way that long
    else if (channel.clockWrong)
      remarks.push(`its clock is ${by} behind the server’s, or its data come that late`);
    else remarks.push(`its data come ${by} late`);
  }
  if (channel.refused > 0) {
    remarks.push(
      `${counted(channel.refused, 'frame')} refused${channel.refusal ? `: ${channel.refusal}` : ''}`,
    );
  }
  return remarks;
}

/** The line of facts: "3 channels · 2.5 samples/s each · nothing missed since 11:20", from what was counted. */
export function factsText(channels: readonly ChannelState[], demo: boolean, today: number): string {
  if (channels.length === 0) return 'no channel yet';
  const facts = [demo ? `demo, ${counted(channels.length, 'channel')}` : counted(channels.length, 'channel')];
  const rates = channels
    .filter((channel) => !channel.silent && channel.rate !== null)
    .map((channel) => channel.rate!);
  if (rates.length > 0) facts.push(ratesText(rates));
  const firsts = channels.map((channel) => channel.first).filter((first) => first !== null);
  const since = firsts.length > 0 ? ` since ${minuteText(Math.min(...firsts), today)}` : '';
  facts.push(missedText(channels) + since);
  return facts.join(' · ');
}

function ratesText(rates: number[]): string {
  const least = Math.min(...rates);
  const most = Math.max(...rates);
  const text = (rate: number) => (rate >= 100 ? rate.toFixed(0) : String(Number(rate.toPrecision(2))));
  if (rates.length === 1) return `${text(most)} samples/s`;
  return most - least <= 0.1 * most
    ? `${text(most)} samples/s each`
    : `${text(least)} to ${text(most)} samples/s`;
}

function missedText(channels: readonly ChannelState[]): string {
  const sum = (of: (channel: ChannelState) => number) =>
    channels.reduce((total, channel) => total + of(channel), 0);
  const parts: string[] = [];
  const holes = sum((channel) => channel.holes);
  const gaps = sum((channel) => channel.gaps);
  const refused = sum((channel) => channel.refused);
  if (holes > 0) parts.push(`${counted(holes, 'frame')} never came`);
  if (refused > 0) parts.push(`${counted(refused, 'frame')} refused`);
  if (gaps > 0) parts.push(counted(gaps, 'gap'));
  if (holes === 0 && refused === 0) parts.unshift('nothing missed');
  return parts.join(', ');
}

function pad(value: number): string {
  return String(value).padStart(2, '0');
}

function mod(value: number, by: number): number {
  return ((value % by) + by) % by;
}
