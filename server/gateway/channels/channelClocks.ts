import type { Channels, Moment } from './channels.ts';

/** A channel's clock went wrong, or is right again; a sentence. */
export interface ClockNews {
  channel: string;
  wrong: boolean;
  /** server clock minus channel time */
  offset: number;
  text: string;
}

/** Times below are elapsed time. */
const UNIX_FROM = 1e8;
/** Times further back are a recording that is being played, not a clock. */
const DAY_SECONDS = 86_400;

/**
 * Watches the clocks of live channels that send Unix time. What counts is the least offset lately, so that data held up
 * on the way and sent after do not look like a wrong clock. Right again is what is within half the tolerance.
 *
 * @param tolerance seconds
 * @returns what has changed since the last call
 */
export function createChannelClocks(tolerance: number): (channels: Channels, moment: Moment) => ClockNews[] {
  const wrong = new Set<string>();
  const judge = (channel: string, offset: number): ClockNews | null => {
    const off = Math.abs(offset);
    if (!wrong.has(channel) && off > tolerance && offset < DAY_SECONDS) {
      wrong.add(channel);
      const text =
        offset < 0
          ? `the times of "${channel}" are ${off.toFixed(1)} s ahead of the server's clock; set the producer's clock, or the server's`
          : `the times of "${channel}" are ${off.toFixed(1)} s behind the server's clock: its clock is wrong, or its data come that late; set the clock, or send sooner`;
      return { channel, wrong: true, offset, text };
    }
    if (wrong.has(channel) && off < tolerance / 2) {
      wrong.delete(channel);
      return {
        channel,
        wrong: false,
        offset,
        text: `the clock of "${channel}" agrees with the server's again`,
      };
    }
    return null;
  };
  return (channels, moment) =>
    channels.names().flatMap((channel) => {
      const newest = channels.newest(channel);
      const offset = channels.leastOffset(channel);
      if (newest === null || newest < UNIX_FROM || offset === null || channels.silent(channel, moment))
        return [];
      return judge(channel, offset) ?? [];
    });
}
