import type { ModelEvidence } from '../../shared-types/model.ts';
import { place } from '../card/cardDrawing.ts';
import { element, mark, say } from '../dom.ts';
import { shape, svgWords } from '../svg.ts';
import { decadesOf } from './scales.ts';

const WIDTH = 430;
const HEIGHT = 220;
const LEFT = 46;
const RIGHT = 10;
const TOP = 14;
const FOOT = 34;
/** Singular values drawn at most: the rest is floor. */
const MOST = 60;

/** Singular values on a logarithmic scale with the noise floor; those of the model filled, the others hollow. */
export function spectrumDrawing({
  spectrum,
  noiseFloor,
  rank,
}: Pick<ModelEvidence, 'spectrum' | 'noiseFloor' | 'rank'>): HTMLElement {
  const drawn = spectrum.slice(0, Math.max(rank + 2, MOST));
  const [low, high] = decadesOf([...drawn.map((value) => Math.max(value, 1e-17 * spectrum[0]!)), noiseFloor]);
  const bottom = HEIGHT - FOOT;
  const x = { low: 0, high: drawn.length + 1, from: LEFT, to: WIDTH - RIGHT };
  const y = { low, high, from: bottom, to: TOP };
  const at = (value: number) => place(y, Math.log10(Math.max(value, 10 ** low)));
  const step = Math.max(1, Math.ceil((high - low) / 6));
  const decades = Array.from({ length: Math.floor((high - low) / step) + 1 }, (_, k) => low + k * step);
  const floor = at(noiseFloor);
  const svg = shape('svg', { viewBox: `0 0 ${WIDTH} ${HEIGHT}`, 'aria-hidden': 'true' });
  svg.append(
    shape('rect', {
      class: 'evidencePanel',
      x: LEFT,
      y: TOP,
      width: WIDTH - RIGHT - LEFT,
      height: bottom - TOP,
    }),
    ...decades.flatMap((decade) => [
      shape('line', {
        class: 'evidenceRule',
        x1: LEFT,
        x2: WIDTH - RIGHT,
        y1: place(y, decade),
        y2: place(y, decade),
      }),
      powerOfTen(LEFT - 6, place(y, decade) + 4, decade),
    ]),
    shape('line', { class: 'noiseFloor', x1: LEFT, x2: WIDTH - RIGHT, y1: floor, y2: floor }),
    svgWords(WIDTH - RIGHT - 4, floor - 5, 'noise floor', 'end', 'noiseFloorWords'),
    ...drawn.map((value, k) =>
      shape('circle', {
        class: k < rank ? 'kept' : 'left',
        cx: place(x, k + 1),
        cy: at(value),
        r: k < rank ? 4 : 2.6,
      }),
    ),
    svgWords(place(x, 1), bottom + 14, '1', 'middle'),
    svgWords(place(x, rank), bottom + 14, rank === 1 ? '' : String(rank), 'middle'),
    svgWords(
      place(x, drawn.length),
      bottom + 14,
      drawn.length > rank + 1 ? String(drawn.length) : '',
      'middle',
    ),
    svgWords((LEFT + WIDTH - RIGHT) / 2, HEIGHT - 4, 'singular value, in order of size', 'middle'),
  );
  const paper = element('div', 'evidencePaper');
  mark(paper, 'role', 'img');
  const above = spectrum.filter((value) => value > noiseFloor).length;
  const words = `${rank} of ${spectrum.length} are used (filled); ${above} stand above the noise floor.`;
  mark(paper, 'aria-label', `Singular values on a logarithmic scale. ${words}`);
  paper.append(svg);
  const caption = element('p', 'evidenceWords');
  say(caption, words);
  return element('div', '', paper, caption);
}

function powerOfTen(x: number, y: number, exponent: number): SVGTextElement {
  const made = svgWords(x, y, '10', 'end');
  const raised = shape('tspan', { dy: -5, class: 'exponent' });
  raised.textContent = String(exponent).replace('-', '−');
  made.append(raised);
  return made;
}
