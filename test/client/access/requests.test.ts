import { describe, expect, it } from 'vitest';
import { tokenIn } from '../../../client/access/requests.ts';
import { whoText } from '../../../client/access/signedIn.ts';

describe('an address with a token', () => {
  it('gives it once and is an ordinary address afterwards', () => {
    expect(tokenIn('#token=AbC-123_x')).toEqual({ token: 'AbC-123_x', rest: '#/' });
  });

  it('is not taken for one where it leads to a page', () => {
    for (const hash of ['', '#/', '#/logbook', '#token=', '#/token=x', '#token=a b'])
      expect(tokenIn(hash), hash).toBeNull();
  });
});

describe('the line of who is signed in', () => {
  it('names the token and what it may do', () => {
    expect(whoText({ tokens: true, role: 'operator', name: 'desk' })).toBe('Signed in as desk, an operator.');
    expect(whoText({ tokens: true, role: 'viewer', name: 'hall' })).toMatch(/^Signed in as hall, a viewer/);
  });
});
