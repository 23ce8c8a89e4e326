import { describe, expect, it } from 'vitest';
import { chargedDelay, delayLine, delayRows, delaySentence, delayText } from '../../../client/delay/words.ts';
import { delay } from './fixtures.ts';

describe('a measured delay in words', () => {
  it('says what is left of the least lead', () => {
    expect(delaySentence(delay())).toBe(
      'A warning reaches you 0.32 s after the sample that told of it: of the least lead of 10 s, 9.7 s are left for you.',
    );
    expect(delaySentence(delay({ total: 0.01, left: 9.99 }))).toContain('nearly all is left');
  });

  it('says so when nothing is left, and nothing of it without a watch rule', () => {
    const eaten = delay({ total: 1.2, leastLead: 1, left: -0.2 });
    expect(delaySentence(eaten)).toMatch(/whole least lead of 1 s and more/);
    expect(delayLine(eaten)).toMatch(/eats the least lead/);
    expect(delaySentence(delay({ leastLead: null, left: null }))).not.toMatch(/lead/);
  });

  it('says when it was measured, on the strip', () => {
    expect(delayLine(delay())).toBe('a warning reaches you 0.32 s late, measured at 22:13');
  });

  it('has a row for each part, tells estimates from measurements, and says what is missing', () => {
    const rows = delayRows(delay());
    expect(rows.map(({ name, seconds }) => [name, seconds])).toEqual([
      ['Rig', '0.25 s'],
      ['Network', 'about 4 ms'],
      ['Program', '1 ms'],
      ['Delivery', '60 ms'],
      ['page', '60 ms'],
      ['tone', '–'],
      ['webhook bench lamp', '0.12 s'],
      ['Together', '0.32 s'],
      ['Left for you', '9.7 s'],
    ]);
    expect(rows[5]!.text).toBe('not measured: it is switched off');
    expect(delayRows(delay({ left: -1 })).at(-1)!.seconds).toBe('nothing');
  });

  it.each([
    [0.00031, '0.31 ms'],
    [0.0823, '82 ms'],
    [0.0996, '0.1 s'],
    [1.234, '1.2 s'],
    [12.3, '12 s'],
    [200, '3 min 20 s'],
  ])('gives %f s two digits', (seconds, text) => {
    expect(delayText(seconds)).toBe(text);
  });

  it.each([
    [0, '0'],
    [0.2, '0.2'],
    [0.21, '0.3'],
    [1.3, '1.3'],
  ])('of %f s is charged to a rehearsal as %s: never less', (total, text) => {
    expect(chargedDelay(total)).toBe(text);
  });
});
