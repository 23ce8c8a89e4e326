import { describe, expect, it } from 'vitest';
import { NOTHING_YET, type PageState } from '../../../client/feedState.ts';
import { stripHeight, stripKeys } from '../../../client/watch/stripKeys.ts';
import type { WatchState } from '../../../shared-types/watch.ts';
import { channel, watch } from '../fixtures.ts';

const state = (channels: string[], watches: WatchState[]): PageState => ({
  ...NOTHING_YET,
  channels: new Map(channels.map((name) => [name, channel({ channel: name })])),
  watches: new Map(watches.map((each) => [each.watch, each])),
});

describe('the strips of the page', () => {
  it('are one a channel, with its watch where it has one', () => {
    expect(stripKeys(state(['Loop A', 'Room'], [watch()]))).toEqual([
      { channel: 'Loop A', watch: 'a' },
      { channel: 'Room', watch: null },
    ]);
  });

  it('are one a watch where a channel has several', () => {
    const two = [watch(), watch({ watch: 'b', name: 'second' })];
    expect(stripKeys(state(['Loop A'], two)).map((key) => key.watch)).toEqual(['a', 'b']);
  });

  it('leave out watches on trial and those taken out of use', () => {
    const unseen = [watch({ use: 'on trial' }), watch({ watch: 'b', use: 'taken out of use' })];
    expect(stripKeys(state(['Loop A'], unseen))).toEqual([{ channel: 'Loop A', watch: null }]);
  });

  it('fill the window while they are few and stay readable when they are many', () => {
    expect(stripHeight(2, 900, 226)).toBeGreaterThan(300);
    expect(stripHeight(16, 900, 226)).toBeGreaterThanOrEqual(180);
    expect(stripHeight(1, 3000, 226)).toBeLessThanOrEqual(420);
  });
});
