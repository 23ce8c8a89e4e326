import type { OperatingRow, RehearsalResult } from '../../shared-types/rehearsal.ts';
import { place, type Scale, secondsTicks } from '../card/cardDrawing.ts';
import { element, mark } from '../dom.ts';
import { shape, svgWords } from '../svg.ts';
import { counted, numberText, spanText } from '../words.ts';
import { countInto, createHistogram } from './histogram.ts';

const HEIGHT = 190;
const LEFT = 34;
const RIGHT = 12;
const TOP = 34;
const FOOT = 40;

/** The leads of the warned switches as a histogram. */
export interface LeadChart {
  root: HTMLElement;
  follow(row: OperatingRow): void;
}

/** Creates the histogram, empty until it follows a row. */
export function createLeadChart({ request, table, settings }: RehearsalResult, word: string): LeadChart {
  const histogram = createHistogram(settings.leastLead, settings.horizon, request.delay);
  const most = Math.max(1, ...table.rows.map((row) => mostOf(row)));
  const paper = element('div', 'leadChart');
  mark(paper, 'role', 'img');
  let bars: SVGElement[] = [];
  let random: SVGElement[] = [];
  let x: Scale | null = null;
  let y: Scale | null = null;
  let shown: OperatingRow | null = null;

  function mostOf(row: OperatingRow): number {
    countInto(histogram, row.leads);
    return histogram.most;
  }
  const draw = () => {
    const width = paper.clientWidth;
    if (width === 0) return;
    const { start, width: bin, counts } = histogram;
    const bottom = HEIGHT - FOOT;
    x = { low: start, high: start + bin * counts.length, from: LEFT, to: width - RIGHT };
    y = { low: 0, high: most, from: bottom, to: TOP };
    const svg = shape('svg', {
      width,
      height: HEIGHT,
      viewBox: `0 0 ${width} ${HEIGHT}`,
      'aria-hidden': 'true',
    });
    const ticks = secondsTicks(x.low, x.high, x.to - x.from);
    const decimals = ticks.some((tick) => !Number.isInteger(tick)) ? 1 : 0;
    const least = place(x, settings.leastLead - request.delay);
    bars = [...counts].map((_, i) =>
      shape('rect', {
        class: 'leadBar',
        x: place(x!, start + i * bin) + 0.5,
        width: Math.max(1, place(x!, start + (i + 1) * bin) - place(x!, start + i * bin) - 1),
        y: bottom,
        height: 0,
      }),
    );
    random = [
      shape('line', { class: 'randomLead', y1: TOP - 4, y2: bottom }),
      svgWords(0, TOP - 8, 'random warner', 'middle', 'randomLead'),
    ];
    svg.append(
      shape('rect', { class: 'cardPanel', x: LEFT, y: TOP, width: x.to - LEFT, height: bottom - TOP }),
      ...ticks.flatMap((tick) => [
        shape('line', { class: 'cardRule', x1: place(x!, tick), x2: place(x!, tick), y1: TOP, y2: bottom }),
        svgWords(place(x!, tick), bottom + 14, numberText(tick, decimals), 'middle'),
      ]),
      svgWords(LEFT - 5, TOP + 8, String(most), 'end'),
      svgWords(LEFT - 5, bottom + 3, '0', 'end'),
      ...bars,
      shape('line', { class: 'leastLead', x1: least, x2: least, y1: TOP - 18, y2: bottom }),
      svgWords(least + 5, TOP - 22, 'least lead', 'start', 'leastLead'),
      ...random,
      svgWords((x.from + x.to) / 2, HEIGHT - 4, `seconds from warning to ${word}`, 'middle'),
    );
    paper.replaceChildren(svg);
    if (shown !== null) follow(shown);
  };
  const follow = (row: OperatingRow) => {
    shown = row;
    countInto(histogram, row.leads);
    mark(paper, 'aria-label', leadsText(row, word));
    if (x === null || y === null) return;
    for (let i = 0; i < bars.length; i++) {
      const top = place(y, histogram.counts[i]!);
      bars[i]!.setAttribute('y', top.toFixed(1));
      bars[i]!.setAttribute('height', (y.from - top).toFixed(1));
    }
    const at = row.score.lead.random;
    for (const each of random) each.style.display = at === null ? 'none' : '';
    if (at === null) return;
    const across = place(x, at).toFixed(1);
    random[0]!.setAttribute('x1', across);
    random[0]!.setAttribute('x2', across);
    const half = 40;
    random[1]!.setAttribute('x', String(Math.min(x.to - half, Math.max(x.from + half, Number(across)))));
  };
  new ResizeObserver(draw).observe(paper);
  return { root: paper, follow };
}

function leadsText({ leads, score }: OperatingRow, word: string): string {
  const { median, random } = score.lead;
  if (median === null) return `No ${word} was warned in time.`;
  const other = random === null ? '' : `, that of a random warner with as many warnings ${spanText(random)}`;
  return `Leads of ${counted(leads.length, `warned ${word}`)}: the median is ${spanText(median)}${other}.`;
}
