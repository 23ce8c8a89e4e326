import { describe, expect, it } from 'vitest';
import { stripAddress, stripPlaceAt } from '../../../client/watch/place.ts';

describe('the address of a moment on a strip', () => {
  it('comes back as the moment it was made of', () => {
    for (const channel of ['Loop A', 'a+b, c', 'Größe 1'])
      for (const at of [1_796_115_600.25, 12.5, -3])
        expect(stripPlaceAt(stripAddress({ channel, at, seconds: 120 }))).toEqual({
          channel,
          at,
          seconds: 120,
        });
  });

  it('is none where it names no time or no span', () => {
    for (const hash of [
      '#/',
      '#/logbook',
      '#/at/Loop',
      '#/at/Loop/x/60',
      '#/at/Loop/5/0',
      '#/at/%E0%A4%A/5/60',
    ])
      expect(stripPlaceAt(hash)).toBeNull();
  });
});
