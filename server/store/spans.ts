/** A stretch of samples whose times ascend. */
export interface Segment {
  id: number;
  /** the series' ordinal of its first sample, samples, first and last time */
  ordinal: number;
  samples: number;
  first: number;
  last: number;
  /** whether any of its samples is still there */
  kept: 0 | 1;
}

/** A part of a segment's time range, both ends included. */
export interface Span {
  segment: Segment;
  from: number;
  to: number;
  /** the end belongs to the span that follows or came before, not to this one */
  fromOpen: boolean;
  toOpen: boolean;
}

/**
 * What is seen of segments between two times: in time order and nowhere twice; where segments overlap (a rig with
 * elapsed time was started again) the one that arrived last is seen.
 *
 * @param segments in order of arrival
 */
export function visibleSpans(segments: readonly Segment[], from: number, to: number): Span[] {
  let seen: Span[] = [];
  for (const segment of segments) {
    if (segment.kept === 0) continue;
    const cover = { from: Math.max(from, segment.first), to: Math.min(to, segment.last) };
    if (cover.from > cover.to) continue;
    seen = seen.flatMap((span) => around(span, cover.from, cover.to));
    seen.push({ segment, ...cover, fromOpen: false, toOpen: false });
  }
  return seen.sort((a, b) => a.from - b.from || a.to - b.to);
}

function around(span: Span, from: number, to: number): Span[] {
  if (span.to < from || span.from > to) return [span];
  const parts: Span[] = [];
  if (span.from < from) parts.push({ ...span, to: from, toOpen: true });
  if (span.to > to) parts.push({ ...span, from: to, fromOpen: true });
  return parts;
}
