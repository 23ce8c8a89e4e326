import type { ModelEvidence } from '../../shared-types/model.ts';
import { place } from '../card/cardDrawing.ts';
import { element, mark } from '../dom.ts';
import { shape, svgWords } from '../svg.ts';
import { densitiesOf, gaussian } from './scales.ts';
import { forcingText } from './words.ts';

const WIDTH = 430;
const HEIGHT = 220;
const LEFT = 46;
const RIGHT = 10;
const TOP = 14;
const FOOT = 34;
/** The logarithmic scale of the density goes from 10^−5 to 1. */
const LOWEST = -5;

/** The forcing's distribution (bars) against a Gaussian of the same variance (line), on a logarithmic scale. */
export function forcingDrawing(forcing: ModelEvidence['diagnostics']['forcing']): HTMLElement {
  const words = element('p', 'evidenceWords', forcingText(forcing));
  const { counts } = forcing;
  if (counts === undefined)
    return element(
      'div',
      '',
      words,
      element('p', 'evidenceWords', 'An older model file: it does not carry the distribution.'),
    );
  const bottom = HEIGHT - FOOT;
  const span = -counts.from;
  const x = { low: -span, high: span, from: LEFT, to: WIDTH - RIGHT };
  const y = { low: LOWEST, high: 0, from: bottom, to: TOP };
  const height = (density: number) => place(y, Math.max(LOWEST, Math.log10(density)));
  const bars = densitiesOf(counts).filter(({ density }) => density > 10 ** LOWEST);
  const curve = Array.from({ length: 121 }, (_, i) => -span + (2 * span * i) / 120)
    .filter((at) => gaussian(at) > 10 ** LOWEST)
    .map((at, i) => `${i === 0 ? 'M' : 'L'}${place(x, at).toFixed(1)},${height(gaussian(at)).toFixed(1)}`)
    .join('');
  const svg = shape('svg', { viewBox: `0 0 ${WIDTH} ${HEIGHT}`, 'aria-hidden': 'true' });
  const width = place(x, counts.width) - place(x, 0);
  svg.append(
    shape('rect', {
      class: 'evidencePanel',
      x: LEFT,
      y: TOP,
      width: WIDTH - RIGHT - LEFT,
      height: bottom - TOP,
    }),
    ...[-4, -3, -2, -1].map((decade) =>
      shape('line', {
        class: 'evidenceRule',
        x1: LEFT,
        x2: WIDTH - RIGHT,
        y1: place(y, decade),
        y2: place(y, decade),
      }),
    ),
    ...bars.map(({ x: at, density }) =>
      shape('rect', {
        class: 'forcingBar',
        x: place(x, at) - width / 2 + 0.5,
        width: width - 1,
        y: height(density),
        height: bottom - height(density),
      }),
    ),
    shape('path', { class: 'gaussian', d: curve }),
    svgWords(place(x, 1.9), height(gaussian(1.4)), 'Gaussian', 'start', 'gaussianWords'),
    svgWords(LEFT - 6, TOP + 4, '1', 'end'),
    svgWords(LEFT - 6, place(y, -2) + 4, '0.01', 'end'),
    svgWords(LEFT - 6, place(y, -4) + 4, '0.0001', 'end'),
    ...[-4, -2, 0, 2, 4].map((at) =>
      svgWords(place(x, at), bottom + 14, String(at).replace('-', '−'), 'middle'),
    ),
    svgWords((LEFT + WIDTH - RIGHT) / 2, HEIGHT - 4, 'forcing, sd; density on a logarithmic scale', 'middle'),
  );
  const paper = element('div', 'evidencePaper', svg as unknown as HTMLElement);
  mark(paper, 'role', 'img');
  mark(paper, 'aria-label', `Distribution of the forcing. ${forcingText(forcing)}`);
  return element('div', '', paper, words);
}
