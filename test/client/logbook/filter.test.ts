import { describe, expect, it } from 'vitest';
import {
  EVERYTHING,
  type Filter,
  faultOf,
  filterAt,
  KINDS,
  letsAllThrough,
  placeOf,
  queryOf,
  secondsOf,
} from '../../../client/logbook/filter.ts';

const NOW = 1_796_115_600;
const filter = (changes: Partial<Filter>): Filter => ({ ...EVERYTHING, ...changes });
const query = (changes: Partial<Filter>) => queryOf(filter(changes), NOW).toString();

describe('a filter as a query', () => {
  it('asks for everything with nothing', () => {
    expect(query({})).toBe('');
    expect(letsAllThrough(EVERYTHING)).toBe(true);
  });

  it('names channel, watch and text, without the blanks around it', () => {
    expect(query({ channel: 'Loop A', watch: 'loop-a', text: '  came true ' })).toBe(
      'channel=Loop+A&watch=loop-a&text=came+true',
    );
    expect(query({ text: '   ' })).toBe('');
  });

  it('spells the kinds out as the log calls them', () => {
    expect(query({ kinds: new Set(['warnings', 'gaps']) })).toBe(
      'kind=warning&kind=gap&kind=hole&kind=refused',
    );
  });

  it('counts spans back from now and takes ranges as UTC, the last minute whole', () => {
    expect(query({ span: '3600' })).toBe(`from=${NOW - 3600}`);
    const range = { span: 'range', from: '2026-12-01T09:00', to: '2026-12-01T09:30' };
    // 2026-12-01T09:00:00Z is 20788 days of 86400 s and nine hours after 1970
    expect(query(range)).toBe(
      `from=${20_788 * 86_400 + 9 * 3600}&to=${20_788 * 86_400 + 9.5 * 3600 + 59.999}`,
    );
    expect(query({ ...range, to: '' })).toBe(`from=${20_788 * 86_400 + 9 * 3600}`);
    expect(query({ from: '2026-12-01T09:00' })).toBe('');
    expect(secondsOf('tomorrow')).toBeNull();
  });

  it('is refused where a range ends before it begins', () => {
    const range = filter({ span: 'range', from: '2026-12-01T10:00', to: '2026-12-01T09:00' });
    expect(faultOf(range)).toMatch(/swap/);
    expect(faultOf({ ...range, to: '' })).toBeNull();
    expect(faultOf({ ...range, span: '' })).toBeNull();
  });
});

describe('a filter as a place of the page', () => {
  it('comes back from its address', () => {
    const all: Filter[] = [
      EVERYTHING,
      filter({ channel: 'Loop A & B', text: 'a=b "c"', kinds: new Set(['notes', 'server']) }),
      filter({ span: 'range', from: '2026-12-01T09:00', to: '' }),
      filter({ span: '86400', watch: 'x' }),
    ];
    for (const each of all) expect(filterAt(placeOf(each))).toEqual(each);
  });

  it('leaves out what it does not know', () => {
    expect(filterAt('kinds=warnings+nonsense&span=7&colour=red')).toEqual(
      filter({ kinds: new Set(['warnings']) }),
    );
  });

  it('is everything when all kinds are chosen', () => {
    expect(letsAllThrough(filter({ kinds: new Set(KINDS.map(({ id }) => id)) }))).toBe(true);
  });
});
