import type { ModelEvidence } from '../../shared-types/model.ts';
import { element, mark } from '../dom.ts';
import { capital, clockText, minuteText, numberText, spanText } from '../words.ts';
import { forcingDrawing } from './forcingDrawing.ts';
import { matrixTable } from './matrixTable.ts';
import { spectrumDrawing } from './spectrumDrawing.ts';
import { heldOutText, ruleText, scoreRows } from './words.ts';

/** A model with its evidence; `uses` is the part in which somebody puts it in use or takes it out. */
export function createSheet(model: ModelEvidence, uses: HTMLElement, today: number): HTMLElement {
  const unit = model.channels[0]!.unit;
  const window = model.delays * model.interval;
  const heading = element('h3', '', model.name);
  heading.tabIndex = -1;
  const sheet = element(
    'article',
    'modelSheet',
    element(
      'header',
      '',
      heading,
      element(
        'p',
        'sheetFacts',
        `${model.channels.map(({ channel }) => channel).join(' + ')} · window ${spanText(Number(window.toPrecision(3)))} (${model.delays} delays of ${spanText(model.interval)}) · rank ${model.rank}`,
      ),
      element('p', 'sheetRule', capital(`${ruleText(model.rule, unit)}.`)),
    ),
    uses,
    part('What rehearsal said', promise(model)),
    part('Singular values', spectrumDrawing(model)),
    part('Linear model', matrixTable(model.A, model.B), element('p', 'evidenceWords', structureText(model))),
    part('The forcing', forcingDrawing(model.diagnostics.forcing)),
    part('On data held out', heldOut(model, window)),
    part('Where it comes from', provenance(model, today)),
  );
  mark(sheet, 'aria-label', `Model ${model.name}`);
  return sheet;
}

function part(title: string, ...content: HTMLElement[]): HTMLElement {
  return element('section', 'sheetPart', element('h4', '', title), ...content);
}

function promise({ score, switchWord, verdict }: ModelEvidence): HTMLElement {
  if (score === null)
    return element(
      'p',
      'evidenceWords',
      'It was not rehearsed: how well it warns is not known. Rehearse a recording and put the result in use instead.',
    );
  const rows = scoreRows(score, switchWord).map(([name, figure, interval]) => {
    const head = element('th', '', name);
    head.scope = 'row';
    return element('tr', '', head, element('td', 'figure', figure), element('td', 'soft', interval));
  });
  const words =
    verdict === undefined ? '' : `Verdict: ${[verdict.kind, verdict.than].filter(Boolean).join(' ')}.`;
  return element(
    'div',
    '',
    element('p', 'sheetVerdict', words),
    element('table', 'sheetFigures', element('tbody', '', ...rows)),
  );
}

function structureText({ diagnostics: { antisymmetryDefect, eigenvalues } }: ModelEvidence): string {
  const fastest = Math.max(...eigenvalues.map(({ im }) => Math.abs(im)), 0);
  const swing =
    fastest > 0
      ? ` Its fastest swing takes ${spanText(Number(((2 * Math.PI) / fastest).toPrecision(2)))}.`
      : '';
  return `Departure from antisymmetry ${numberText(antisymmetryDefect, 2)} (0: antisymmetric, 2: symmetric).${swing}`;
}

function heldOut({ diagnostics }: ModelEvidence, window: number): HTMLElement {
  const rows = diagnostics.r2.map((all, i) => {
    const held = diagnostics.heldOut?.oneStepR2[i];
    const head = element('th', '', `row ${i + 1}`);
    head.scope = 'row';
    const bar = element('span', 'shareBar');
    bar.style.setProperty('--share', `${Math.round(100 * Math.max(0, held ?? all))}%`);
    return element(
      'tr',
      '',
      head,
      element('td', '', bar),
      element('td', 'figure', numberText(all, 3)),
      element('td', 'figure', held === undefined ? '–' : numberText(held, 3)),
    );
  });
  const heads = ['R² of the derivative', '', 'all', 'held out'].map((text) => {
    const head = element('th', '', text);
    head.scope = 'col';
    return head;
  });
  return element(
    'div',
    '',
    element(
      'div',
      'tableScroll',
      element(
        'table',
        'sheetFigures',
        element('thead', '', element('tr', '', ...heads)),
        element('tbody', '', ...rows),
      ),
    ),
    element('p', 'evidenceWords', heldOutText(diagnostics.heldOut, window)),
  );
}

const shareOf = (share: number): string =>
  share === 0 ? 'no training window' : `${Number((100 * share).toPrecision(2))} % of the training windows`;

function provenance({ provenance: from, diagnostics, validity }: ModelEvidence, today: number): HTMLElement {
  const recordings = from.recordings.map(({ name, from: begin, to, samples, sha256 }) =>
    element(
      'li',
      '',
      `${name}, ${begin < 1e8 ? clockText(begin) : minuteText(begin, today)} to ${to < 1e8 ? clockText(to) : minuteText(to, today)}, ${samples} samples, SHA-256 `,
      element('code', '', sha256 === '' ? 'not known' : `${sha256.slice(0, 16)}…`),
    ),
  );
  const lines = [
    `Fitted ${from.fittedAt === '' ? 'at a time not known' : from.fittedAt.replace('T', ' ').replace(/\.\d+Z$/, ' UTC')} by ${from.program || 'a program not named'} from ${diagnostics.samples} samples, by ${diagnostics.method}.`,
    `Window: ${diagnostics.windowChoice}. Rank: ${diagnostics.rankChoice}.`,
    validity === null
      ? 'It carries no limits of likeness.'
      : `Data are taken for unlike the model beyond limits that ${shareOf(validity.beyond)} passed.`,
  ];
  return element(
    'div',
    'sheetProvenance',
    ...lines.map((text) => element('p', '', text)),
    recordings.length === 0
      ? element('p', '', 'Its recordings are not named.')
      : element('ul', '', ...recordings),
  );
}
