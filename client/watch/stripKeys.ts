import type { PageState } from '../feedState.ts';
import type { StripKey } from '../strip/view.ts';

/**
 * The strips a state calls for, in the channels' order: one for each watch in use, below the first channel it
 * watches, and one for each channel that no watch in use draws.
 */
export function stripKeys(state: PageState): StripKey[] {
  const watches = [...state.watches.values()].filter((watch) => watch.use === 'in use');
  return [...state.channels.keys()].flatMap((channel): StripKey[] => {
    const here = watches.filter((watch) => watch.channels[0] === channel);
    return here.length === 0 ? [{ channel, watch: null }] : here.map(({ watch }) => ({ channel, watch }));
  });
}

/** Height of a strip in CSS pixels so that few strips fill the window and many can be scrolled through. */
export function stripHeight(count: number, windowHeight: number, taken: number): number {
  const fair = (windowHeight - taken) / Math.max(1, count) - 18;
  return Math.round(Math.min(420, Math.max(count > 4 ? 196 : 236, fair)));
}
