import type { Database } from 'better-sqlite3';
import { ChannelDescription, type Columns } from '../../shared-types/channel.ts';
import { gatherColumns } from './drawing.ts';
import { FAN_OUT } from './pyramid.ts';
import { createSampleReader, type SampleReader, type Visitor } from './sampleReader.ts';
import { visibleSpans } from './spans.ts';
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
  const channels = database.prepare("SELECT * FROM series WHERE kind = 'channel' ORDER BY id");
  const interval = database
    .prepare("SELECT json_extract(description, '$.interval') FROM series WHERE id = ?")
    .pluck();
  return {
    channels: () => (channels.all() as SeriesRow[]).map(storedChannel),
    samplesFrom: (channel, ordinal, most) => samplesFrom(reader, channel, ordinal, most),
    samplesBetween: (channel, from, to) => samplesBetween(reader, channel, from, to),
    columns: (kind, name, from, to, columns) => {
      const series = reader.findSeries(kind, name);
      if (series === null) return emptyColumns();
      return drawn(reader, series, from, to, columns, interval.get(series) as number | null);
    },
    recordings: (gapSeconds) =>
      (channels.all() as SeriesRow[]).flatMap((row) => recordingsOf(reader, row.id, row.name, gapSeconds)),
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

function emptyBlock(ordinal: number, samples: number): StoredBlock {
  return { ordinal, times: new Float64Array(samples), values: new Float64Array(samples) };
}

function samplesFrom(reader: SampleReader, channel: string, ordinal: number, most: number): StoredBlock {
  const series = reader.findSeries('channel', channel);
  const segment =
    series === null ? undefined : reader.segments(series).find((s) => s.ordinal + s.samples > ordinal);
  if (segment === undefined) return emptyBlock(ordinal, 0);
  const from = Math.max(0, ordinal - segment.ordinal);
  const to = Math.min(segment.samples, from + most);
  const block = emptyBlock(segment.ordinal + from, to - from);
  reader.readInto(segment, from, to, block.times, block.values, 0);
  return block;
}

function samplesBetween(reader: SampleReader, channel: string, from: number, to: number): StoredBlock {
  const series = reader.findSeries('channel', channel);
  const spans = series === null ? [] : visibleSpans(reader.segments(series), from, to);
  const ranges = spans.map((span) => ({ segment: span.segment, ...reader.rangeOf(span) }));
  const samples = ranges.reduce((sum, range) => sum + range.to - range.from, 0);
  const start = ranges[0];
  const block = emptyBlock(start === undefined ? 0 : start.segment.ordinal + start.from, samples);
  let filled = 0;
  for (const range of ranges) {
    reader.readInto(range.segment, range.from, range.to, block.times, block.values, filled);
    filled += range.to - range.from;
  }
  return block;
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

function recordingsOf(
  reader: SampleReader,
  series: number,
  channel: string,
  gapSeconds: number,
): StoredRecording[] {
  const found: StoredRecording[] = [];
  for (const segment of reader.segments(series))
    for (const [from, to] of cutAtGaps(reader, segment.id, segment.samples, gapSeconds)) {
      const range = reader.rangeOf({ segment, from, to, fromOpen: false, toOpen: false });
      found.push({
        name: `${channel}/${found.length + 1}`,
        channel,
        from,
        to,
        samples: range.to - range.from,
        ordinal: segment.ordinal + range.from,
      });
    }
  return found;
}

function cutAtGaps(
  reader: SampleReader,
  segment: number,
  samples: number,
  gapSeconds: number,
): [number, number][] {
  const stretches: [number, number][] = [];
  const visitor: Visitor = {
    splits: (first, last) => last - first > gapSeconds,
    missing: () => {},
    take: (first, last) => {
      const open = stretches.at(-1);
      if (open === undefined || first - open[1] > gapSeconds) stretches.push([first, last]);
      else open[1] = last;
    },
  };
  reader.walk(segment, HIGHEST_LEVEL, 0, samples, visitor);
  return stretches;
}
