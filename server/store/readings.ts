import type { Database } from 'better-sqlite3';
import { ChannelDescription, type Columns } from '../../shared-types/channel.ts';
import { gatherColumns } from './drawing.ts';
import { createKeptRanges, type KeptRanges } from './keptRanges.ts';
import { FAN_OUT } from './pyramid.ts';
import { createSampleReader, type SampleReader, type Visitor } from './sampleReader.ts';
import { type Segment, type Span, visibleSpans } from './spans.ts';
import type { StoredBlock, StoredChannel, StoredRecording } from './store.ts';
import type { SeriesKind } from './tails.ts';

/** What can be read of channels and traces; each as the method of the same name of `Store`. */
export interface Readings {
  channels(): StoredChannel[];
  samplesFrom(channel: string, ordinal: number, most: number): StoredBlock;
  samplesBetween(channel: string, from: number, to: number): StoredBlock;
  columns(kind: SeriesKind, name: string, from: number, to: number, columns: number): Columns;
  recordings(gapSeconds: number): StoredRecording[];
}

/** Levels worth beginning at: a node of level 7 covers 3·10¹⁰ samples. */
const HIGHEST_LEVEL = 7;

/** Readings of an open database, for the writer (who flushes first) and for readers of other processes alike. */
export function createReadings(database: Database): Readings {
  const reader = createSampleReader(database);
  const kept = createKeptRanges(database);
  const channels = database.prepare("SELECT * FROM series WHERE kind = 'channel' ORDER BY id");
  const interval = database
    .prepare("SELECT json_extract(description, '$.interval') FROM series WHERE id = ?")
    .pluck();
  return {
    channels: () => (channels.all() as SeriesRow[]).map(storedChannel),
    samplesFrom: (channel, ordinal, most) => samplesFrom(reader, kept, channel, ordinal, most),
    samplesBetween: (channel, from, to) => samplesBetween(reader, kept, channel, from, to),
    columns: (kind, name, from, to, columns) => {
      const series = reader.findSeries(kind, name);
      if (series === null) return emptyColumns();
      return drawn(reader, series, from, to, columns, interval.get(series) as number | null);
    },
    recordings: (gapSeconds) =>
      (channels.all() as SeriesRow[]).flatMap((row) =>
        recordingsOf(reader, kept, row.id, row.name, gapSeconds),
      ),
  };
}

interface SeriesRow extends Omit<StoredChannel, 'channel'> {
  id: number;
  name: string;
  description: string;
}

function storedChannel(row: SeriesRow): StoredChannel {
  const { samples, holes, gaps, first, newest, value } = row;
  const description = ChannelDescription.parse({ ...JSON.parse(row.description), channel: row.name });
  return { ...description, samples, holes, gaps, first, newest, value };
}

function emptyColumns(): Columns {
  return { t: new Float64Array(0), low: new Float64Array(0), high: new Float64Array(0) };
}

/** A part of a segment's samples [from, to), all of them there. */
interface Range {
  segment: Segment;
  from: number;
  to: number;
}

function readRanges(reader: SampleReader, ranges: readonly Range[], ordinal: number): StoredBlock {
  const samples = ranges.reduce((sum, range) => sum + range.to - range.from, 0);
  const [start, end] = [ranges[0], ranges.at(-1)];
  const block = {
    ordinal: start === undefined ? ordinal : start.segment.ordinal + start.from,
    next: end === undefined ? ordinal : end.segment.ordinal + end.to,
    times: new Float64Array(samples),
    values: new Float64Array(samples),
  };
  let filled = 0;
  for (const { segment, from, to } of ranges) {
    reader.readInto(segment, from, to, block.times, block.values, filled);
    filled += to - from;
  }
  return block;
}

function samplesFrom(
  reader: SampleReader,
  kept: KeptRanges,
  channel: string,
  ordinal: number,
  most: number,
): StoredBlock {
  const series = reader.findSeries('channel', channel);
  for (const segment of series === null ? [] : reader.segments(series)) {
    const { samples } = segment;
    if (segment.ordinal + samples <= ordinal) continue;
    let wanted = most;
    const ranges: Range[] = [];
    for (const { from, to } of kept.kept(segment, ordinal - segment.ordinal, samples)) {
      if (wanted <= 0) break;
      ranges.push({ segment, from, to: Math.min(to, from + wanted) });
      wanted -= to - from;
    }
    if (ranges.length > 0 || most <= 0) return readRanges(reader, ranges, ordinal);
  }
  return readRanges(reader, [], ordinal);
}

function samplesBetween(
  reader: SampleReader,
  kept: KeptRanges,
  channel: string,
  from: number,
  to: number,
): StoredBlock {
  const series = reader.findSeries('channel', channel);
  const spans = series === null ? [] : visibleSpans(reader.segments(series), from, to);
  return readRanges(
    reader,
    spans.flatMap((span) => rangesOf(reader, kept, span)),
    0,
  );
}

function rangesOf(reader: SampleReader, kept: KeptRanges, span: Span): Range[] {
  const { segment } = span;
  const { from, to } = reader.rangeOf(span);
  return kept.kept(segment, from, to).map((range) => ({ segment, ...range }));
}

function drawn(
  reader: SampleReader,
  series: number,
  from: number,
  to: number,
  columns: number,
  interval: number | null,
): Columns {
  const spans = visibleSpans(reader.segments(series), from, to);
  if (spans.length === 0) return emptyColumns();
  const ranges = spans.map((span) => ({ segment: span.segment, ...reader.rangeOf(span) }));
  const samples = ranges.reduce((sum, range) => sum + range.to - range.from, 0);
  let level = 0;
  while (samples / FAN_OUT ** level > 4 * columns) level++;
  const start = Number.isFinite(from) ? from : spans[0]!.from;
  const end = Number.isFinite(to) ? to : spans.at(-1)!.to;
  // few samples are drawn one by one: columns of their own, far narrower than an interval
  const bins = Math.max(1, Math.floor(columns)) * (samples <= 2 * columns ? 1024 : 1);
  const gatherer = gatherColumns(start, end > start ? end : start + 1, bins);
  for (const range of ranges) reader.walk(range.segment.id, level, range.from, range.to, gatherer);
  return gatherer.columns(interval);
}

/** A recording as it is put together; `segment` alone is not told. */
interface Found extends StoredRecording {
  segment: Segment;
}

function recordingsOf(
  reader: SampleReader,
  kept: KeptRanges,
  series: number,
  channel: string,
  gapSeconds: number,
): StoredRecording[] {
  const found: Found[] = [];
  let number = 0;
  for (const segment of reader.segments(series)) {
    let last = Number.NEGATIVE_INFINITY;
    let open: Found | null = null;
    const begin = (from: number): Found => ({
      ...{ name: `${channel}/${number}`, channel, from, to: from, samples: 0, ordinal: 0 },
      segment,
    });
    const visitor: Visitor = {
      splits: (first, end) => end - first > gapSeconds,
      missing: () => {},
      take: (first, end) => {
        const anew = first - last > gapSeconds;
        if (anew) number++;
        if (anew || open === null) found.push((open = begin(first)));
        open.to = last = end;
      },
    };
    for (const piece of kept.pieces(segment)) {
      if (!piece.pruned) {
        reader.walk(segment.id, HIGHEST_LEVEL, piece.from, piece.to, visitor);
        continue;
      }
      // what began in a pruned stretch is not listed, but keeps its number
      number += piece.recordings;
      if (piece.recordings > 0) open = null;
      last = piece.last ?? last;
    }
  }
  return found.map((recording) => counted(reader, kept, recording));
}

/** With its samples and the ordinal of the first. */
function counted(reader: SampleReader, kept: KeptRanges, { segment, ...told }: Found): StoredRecording {
  const { from, to } = told;
  const ranges = rangesOf(reader, kept, { segment, from, to, fromOpen: false, toOpen: false });
  const samples = ranges.reduce((sum, range) => sum + range.to - range.from, 0);
  return { ...told, samples, ordinal: segment.ordinal + (ranges[0]?.from ?? 0) };
}
