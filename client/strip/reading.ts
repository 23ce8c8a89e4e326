import { nearest } from '../columns.ts';
import { headline, thresholdText } from '../warningWords.ts';
import { clockText, decimalsFor, numberText, spanText } from '../words.ts';
import { type StripView, spokenFor } from './view.ts';

/**
 * What is on the paper at a time, in words: "14:31:20.4, 47 s ago: +2.31 K, forcing 0.42 sd".
 *
 * @param perSecond CSS pixels a second, which set how near a sample must be
 * @param signed    positive values carry their sign
 */
export function readingText(view: StripView, time: number, perSecond: number, signed: boolean): string {
  const reach = Math.max(8 / perSecond, 2 * (view.channel.interval ?? 0));
  const signal = nearest(view.signal, time, reach);
  const trace = nearest(view.trace, time, reach);
  const ago = (view.now ?? time) - time;
  const unit = view.channel.unit === '' ? '' : ` ${view.channel.unit}`;
  const value =
    signal === null
      ? 'no sample'
      : `${numberText(signal.value, decimalsFor(Math.abs(signal.value) || 1), signed)}${unit}`;
  const variable = view.watch?.rule?.variable ?? 'forcing';
  const watched =
    view.watch === null
      ? ''
      : trace === null
        ? ', blind'
        : `, ${variable} ${thresholdText(Number(trace.value.toPrecision(2)), variable, view.channel.unit)}`;
  return `${clockText(time, perSecond > 8 ? 2 : 1)}, ${spanText(ago)} ago: ${value}${watched}`;
}

/** A strip in a few sentences, for those who cannot see it. */
export function summaryText(view: StripView): string {
  const { channel, watch, now } = view;
  const unit = channel.unit === '' ? '' : ` ${channel.unit}`;
  const value =
    channel.value === null
      ? 'no value yet'
      : `${numberText(channel.value, decimalsFor(Math.abs(channel.value) || 1))}${unit}`;
  const parts = [
    `Signal of the last ${spanText(view.page.look.seconds)}; now ${value}${channel.silent ? ', silent' : ''}.`,
  ];
  if (watch === null) return `${parts[0]} Drawn only, no model watches it.`;
  parts.push(`State ${watch.state}.`);
  const switches = (view.page.state.switches.get(watch.watch) ?? []).filter(
    ({ at }) => at >= view.from && at <= view.to,
  );
  parts.push(`${switches.length} ${watch.switchWord} events on the paper.`);
  const warning = spokenFor(view);
  if (warning !== null && now !== null) {
    const words = headline(warning, watch, now);
    parts.push(`${words.what} ${words.when}.`);
  } else parts.push('No warning open.');
  return parts.join(' ');
}
