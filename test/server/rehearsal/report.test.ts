import { describe, expect, it } from 'vitest';
import { trainingSeries } from '../../../server/commands/prepareDemo.ts';
import { runRehearsal } from '../../../server/rehearsal/rehearsal.ts';
import { reportHtml } from '../../../server/rehearsal/report.ts';
import { RehearsalRequest, type RehearsalResult } from '../../../shared-types/rehearsal.ts';

const HOSTILE = `<img src=x onerror="alert('1')"> & co`;

const { times, values } = trainingSeries('Loop B', 1);
const result = runRehearsal({
  request: RehearsalRequest.parse({
    recordings: ['run'],
    channels: ['Loop B'],
    regime: 'sides:-0.3,0.3',
    leastLead: 10,
    horizon: 20,
    ceiling: { falsePerHour: 4 },
    seed: 7,
  }),
  recordings: [
    {
      name: 'run.csv',
      sha256: 'ab'.repeat(32),
      series: [{ channel: 'Loop B', times, values, unit: 'K' }],
      leftOut: [{ from: 100, to: 160, why: 'calibration' }],
    },
  ],
  program: 'foreshift 9.8.7',
  at: '2026-12-01T09:30:00Z',
});
const report = reportHtml(result);

/** Every start tag has its end, in order; elements without content end themselves. */
function faultsOf(text: string): string[] {
  const VOID = new Set(['meta', 'br']);
  const open: string[] = [];
  const faults: string[] = [];
  const body = text.replace('<!DOCTYPE html>', '').replace(/<style>[\s\S]*?<\/style>/, '');
  const tags = /<(\/?)([A-Za-z][A-Za-z0-9]*)((?:\s+[A-Za-z-]+="[^"<>]*")*)\s*(\/?)>/g;
  for (const [, end, name, , self] of body.matchAll(tags)) {
    if (end === '/') {
      const last = open.pop();
      if (last !== name) faults.push(`</${name}> ends <${last}>`);
    } else if (self !== '/') open.push(name!);
    else if (!VOID.has(name!) && !['path', 'rect', 'circle'].includes(name!)) faults.push(`<${name}/>`);
  }
  if (/[<>]/.test(body.replaceAll(tags, ''))) faults.push('a bracket outside a tag');
  if (/&(?!(amp|lt|gt|quot|#39);)/.test(body)) faults.push('a bare ampersand');
  return [...faults, ...open.map((name) => `<${name}> is not ended`)];
}

const figuresOf = (text: string) =>
  [...text.matchAll(/<data value="([^"]*)">/g)].map((match) => Number(match[1]));

describe('the report of a rehearsal', () => {
  it('is well-formed, one file, without script and without a word to any network', () => {
    expect(faultsOf(report)).toEqual([]);
    expect(report).not.toMatch(/https?:|\/\/|<script|<link|<img|@import|url\((?!#)|\son[a-z]+=/i);
    expect(report.match(/<svg/g)!.length).toBeGreaterThanOrEqual(3);
  });

  it('says the answer first, then the verdict in full, and ends with the caution', () => {
    const at = (text: string) => plain.indexOf(text);
    const plain = report.replaceAll('\u00a0', ' ').replaceAll('−', '-');
    expect(at(`<h1>${result.sentence}</h1>`)).toBeGreaterThan(0);
    expect(at(result.verdict.sentence)).toBeGreaterThan(at(result.sentence));
    expect(at('not a safety function')).toBeGreaterThan(at('foreshift 9.8.7'));
  });

  it('holds the figures of the JSON, to the last digit', () => {
    const { score, settings, contenders, request } = result;
    const figures = new Set(figuresOf(report));
    const expected = [
      ...[score.detection, score.cameTrue, score.falseRatio, score.falsePerHour].flatMap(Object.values),
      ...Object.values(score.lead),
      ...[score.skill, score.tau, score.pValue, score.skillShare, score.watchedSeconds],
      ...Object.values(score.switches).filter((count) => count > 0),
      ...Object.values(score.warnings).filter((count) => count > 0),
      ...contenders.flatMap(({ skill, detection, cameTrue }) => [skill, detection, cameTrue]),
      ...[
        settings.threshold,
        settings.rearm,
        settings.window,
        settings.delays,
        settings.rank,
        settings.holdOff,
      ],
      ...[request.seed, result.tried, result.recordings[0]!.samples],
    ].filter((value) => value !== null);
    expect(expected.filter((value) => !figures.has(value))).toEqual([]);
    expect(expected.length).toBeGreaterThan(50);
  });

  it('tells where it comes from: hash, program, what was left out and why', () => {
    for (const text of ['ab'.repeat(32), 'foreshift 9.8.7', '2026-12-01', 'run.csv', 'calibration'])
      expect(report, text).toContain(text);
    expect(report).toMatch(/left out: 100\u00a0s to 160\u00a0s/);
  });

  it('reads spans and rates in years where years were recorded, and keeps the figures', () => {
    const years = 20 * 31_557_600;
    const { settings, score } = result;
    const slow = reportHtml({
      ...result,
      settings: { ...settings, leastLead: years / 40, horizon: years / 8, holdOff: years / 10 },
      score: {
        ...score,
        watchedSeconds: years,
        falsePerHour: { value: 1 / 8766, low: 0, high: 2 / 8766 },
        lead: { ...score.lead, median: years / 16 },
      },
    });
    expect(slow).toContain('lead (years)');
    expect(slow).toContain('least lead 183\u00a0days');
    expect(slow).toContain('false a year');
    expect(slow).toContain(`<data value="${1 / 8766}">1</data>`);
    expect(slow).toContain(`<data value="${years / 16}">457\u00a0days</data>`);
    expect(slow).not.toMatch(/[^"\d.]\d{7,}\u00a0s/);
  });

  it('draws one bar for every lead: their heights add up to the warned switches', () => {
    const bars = [...report.matchAll(/<rect class="bar"[^>]* height="([\d.]+)"/g)].map((match) =>
      Number(match[1]),
    );
    const leads = result.table.rows[result.chosenRow]!.leads;
    const counts = new Array<number>(20).fill(0);
    for (const lead of leads) counts[Math.min(19, Math.floor(lead))]! += 1;
    const tallest = Math.max(...counts);
    const expected = counts.filter((count) => count > 0).map((count) => (196 * count) / tallest);
    expect(bars.length).toBe(expected.length);
    for (const [i, bar] of bars.entries()) expect(bar).toBeCloseTo(expected[i]!, 0);
    expect(report).toContain('least lead 10\u00a0s');
  });

  it('takes names for words, whatever stands in them', () => {
    const hostile: RehearsalResult = {
      ...result,
      sentence: HOSTILE,
      request: { ...result.request, channels: [HOSTILE], regimeChannel: HOSTILE },
      recordings: result.recordings.map((one) => ({ ...one, name: HOSTILE })),
      leftOut: [{ recording: 0, from: 1, to: 2, why: HOSTILE }],
      contenders: result.contenders.map((one) => ({ ...one, name: HOSTILE, settings: HOSTILE })),
      verdict: { ...result.verdict, than: HOSTILE, sentence: HOSTILE },
      program: HOSTILE,
    };
    const text = reportHtml(hostile);
    expect(faultsOf(text)).toEqual([]);
    expect(text).not.toContain('<img');
    expect(text).toContain('&lt;img src=x onerror=&quot;alert(&#39;1&#39;)&quot;&gt; &amp; co');
  });

  it('is whole where nothing was warned and nothing searched', () => {
    const none = { value: null, low: null, high: null };
    const { rows } = result.table;
    const empty: RehearsalResult = {
      ...result,
      pairs: [],
      leftOut: [],
      contenders: [],
      score: {
        ...result.score,
        detection: none,
        cameTrue: none,
        falseRatio: none,
        falsePerHour: none,
        lead: { median: null, p10: null, p90: null, random: null },
        skill: null,
        skillShare: null,
      },
      table: { ...result.table, rows: rows.map((row) => ({ ...row, leads: new Float64Array() })) },
    };
    const text = reportHtml(empty);
    expect(faultsOf(text)).toEqual([]);
    expect(text).not.toMatch(/NaN|Infinity|undefined|null/);
    expect(text).toContain('No switch was warned.');
  });
});
