import type { LogbookKind } from '../../shared-types/logbook.ts';

/** Kinds of lines as a person tells them apart: a name and what the log calls them. */
export const KINDS: readonly { id: string; name: string; kinds: readonly LogbookKind[] }[] = [
  { id: 'warnings', name: 'warnings', kinds: ['warning'] },
  { id: 'switches', name: 'switches', kinds: ['switch'] },
  {
    id: 'people',
    name: 'acknowledged, acted, shelved',
    kinds: ['acknowledged', 'acted', 'latch', 'shelved', 'unshelved', 'out of service', 'in service'],
  },
  { id: 'notes', name: 'notes', kinds: ['note'] },
  { id: 'gaps', name: 'gaps, holes', kinds: ['gap', 'hole', 'refused'] },
  { id: 'likeness', name: 'likeness to the model', kinds: ['likeness'] },
  { id: 'marks', name: 'marks', kinds: ['mark'] },
  { id: 'models', name: 'models, watches', kinds: ['model', 'watch', 'rehearsal', 'play'] },
  { id: 'delivery', name: 'delivery', kinds: ['delivery'] },
  { id: 'server', name: 'server', kinds: ['server'] },
];

/** Spans a person may ask for, seconds back from now. */
export const SPANS: readonly [string, string][] = [
  ['', 'any time'],
  ['3600', 'the last hour'],
  ['28800', 'the last 8 hours'],
  ['86400', 'the last 24 hours'],
  ['604800', 'the last 7 days'],
  ['range', 'from … to …'],
];

/** What a person wants to see of the logbook. Empty strings and an empty set do not restrict. */
export interface Filter {
  channel: string;
  watch: string;
  /** ids of `KINDS`; empty: all */
  kinds: ReadonlySet<string>;
  text: string;
  /** one of `SPANS` */
  span: string;
  /** for 'range': UTC as `2026-12-01T09:30`, or '' for open */
  from: string;
  to: string;
}

/** A filter that lets everything through. */
export const EVERYTHING: Filter = {
  channel: '',
  watch: '',
  kinds: new Set(),
  text: '',
  span: '',
  from: '',
  to: '',
};

/** Whether a filter lets everything through. */
export function letsAllThrough(filter: Filter): boolean {
  return placeOf(filter) === '';
}

/**
 * The filter as the query of the server's logbook.
 *
 * @param now server clock, Unix seconds: where spans are counted back from
 */
export function queryOf(filter: Filter, now: number): URLSearchParams {
  const query = new URLSearchParams();
  for (const { id, kinds } of KINDS)
    if (filter.kinds.has(id)) for (const kind of kinds) query.append('kind', kind);
  for (const name of ['channel', 'watch', 'text'] as const)
    if (filter[name].trim() !== '') query.set(name, filter[name].trim());
  if (filter.span === 'range') {
    const from = secondsOf(filter.from);
    const to = secondsOf(filter.to);
    if (from !== null) query.set('from', String(from));
    // a minute is meant to its end
    if (to !== null) query.set('to', String(to + 59.999));
  } else if (filter.span !== '') query.set('from', String(now - Number(filter.span)));
  return query;
}

/** Unix seconds of a UTC time as a date field gives it; null for none. */
export function secondsOf(field: string): number | null {
  const parts = /^(\d{4})-(\d\d)-(\d\d)T(\d\d):(\d\d)/.exec(field);
  if (parts === null) return null;
  const [year, month, day, hour, minute] = parts.slice(1).map(Number) as [
    number,
    number,
    number,
    number,
    number,
  ];
  return Date.UTC(year, month - 1, day, hour, minute) / 1000;
}

/** What is wrong with a filter, in a sentence; null when nothing is. */
export function faultOf(filter: Filter): string | null {
  if (filter.span !== 'range') return null;
  const from = secondsOf(filter.from);
  const to = secondsOf(filter.to);
  return from !== null && to !== null && from > to
    ? 'The range ends before it begins; swap the two times.'
    : null;
}

/** The filter as a place of the page, for its address; '' for everything. */
export function placeOf(filter: Filter): string {
  const place = new URLSearchParams();
  for (const name of ['channel', 'watch', 'text', 'span'] as const)
    if (filter[name] !== '') place.set(name, filter[name]);
  if (filter.span === 'range')
    for (const name of ['from', 'to'] as const) if (filter[name] !== '') place.set(name, filter[name]);
  if (filter.kinds.size > 0 && filter.kinds.size < KINDS.length)
    place.set('kinds', [...filter.kinds].join(' '));
  return place.toString();
}

/** The filter that a place of the page names; what it does not know it leaves out. */
export function filterAt(place: string): Filter {
  const given = new URLSearchParams(place);
  const span = given.get('span') ?? '';
  const kinds = (given.get('kinds') ?? '').split(' ').filter((id) => KINDS.some((each) => each.id === id));
  return {
    channel: given.get('channel') ?? '',
    watch: given.get('watch') ?? '',
    text: given.get('text') ?? '',
    span: SPANS.some(([value]) => value === span) ? span : '',
    from: given.get('from') ?? '',
    to: given.get('to') ?? '',
    kinds: new Set(kinds),
  };
}
