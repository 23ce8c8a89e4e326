import type { RehearsalResult, TriedSetting } from '../../shared-types/rehearsal.ts';
import { element, mark, say } from '../dom.ts';
import { numberText, spanText } from '../words.ts';
import { densityOf, mapOf, nextCell } from './settingsMap.ts';
import { groups, short } from './text.ts';

/** The map of window against rank: what was tried, its skill as the density of ink, in numbers where one looks. */
export function createMapTable(result: RehearsalResult): HTMLElement {
  const map = mapOf(result.pairs);
  const { settings, tried } = result;
  const reading = element('p', 'mapReading');
  const usual = `${groups(tried)} settings were tried in all. Hover, or walk with the arrow keys, for the numbers.`;
  say(reading, usual);
  if (map.windows.length === 0) {
    const words = `${groups(tried)} settings of plain levels were tried; no window and rank among them.`;
    return element('div', 'mapHost', element('p', 'fieldHelp', words));
  }
  const isChosen = (cell: TriedSetting) =>
    settings.variable === 'forcing' && cell.delays === settings.delays && cell.rank === settings.rank;
  const cells: HTMLElement[][] = map.cells.map((row, r) =>
    row.map((cell, c) => {
      const made = element('td', '', element('span', 'mapInk'));
      made.tabIndex = -1;
      const words = cell === null ? 'not tried' : cellText(cell, isChosen(cell));
      mark(made, 'aria-label', words);
      if (cell !== null) {
        made.style.setProperty('--density', `${Math.round(100 * densityOf(cell.skill))}%`);
        if (isChosen(cell)) mark(made, 'data-chosen', 'yes');
      } else mark(made, 'data-untried', 'yes');
      made.addEventListener('pointerenter', () => say(reading, words));
      made.addEventListener('focus', () => say(reading, words));
      made.addEventListener('keydown', (event) => {
        const to = nextCell(map, { row: r, column: c }, event.key);
        if (to.row === r && to.column === c) return;
        event.preventDefault();
        made.tabIndex = -1;
        cells[to.row]![to.column]!.tabIndex = 0;
        cells[to.row]![to.column]!.focus();
      });
      return made;
    }),
  );
  const start = cells.flat().find((cell) => cell.dataset.chosen === 'yes') ?? cells[0]![0]!;
  start.tabIndex = 0;
  const head = (text: string, scope: 'col' | 'row') => {
    const made = element('th', '', text);
    made.scope = scope;
    return made;
  };
  const table = element(
    'table',
    'map',
    element('caption', 'unseen', 'Skill on the tuning part for each window (across) and rank (down)'),
    element(
      'tbody',
      '',
      ...cells.map((row, r) => element('tr', '', head(String(map.ranks[r]), 'row'), ...row)),
    ),
    element(
      'tfoot',
      '',
      element('tr', '', element('td', ''), ...map.windows.map((window) => head(short(window), 'col'))),
    ),
  );
  table.addEventListener('pointerleave', () => say(reading, usual));
  table.addEventListener('focusout', () => say(reading, usual));
  return element(
    'div',
    'mapHost',
    element('div', 'mapScroll', element('span', 'mapRank', 'rank'), table),
    element('p', 'mapAxis', 'window in seconds'),
    reading,
    scale(),
  );
}

function cellText(cell: TriedSetting, chosen: boolean): string {
  const came = cell.cameTrue === null ? '' : `, ${Math.round(100 * cell.cameTrue)} of 100 coming true`;
  return `Window ${spanText(Number(cell.window.toPrecision(3)))}, rank ${cell.rank}: skill ${numberText(cell.skill, 2)}, ${Math.round(100 * cell.detection)} of 100 warned${came}, above ${short(cell.threshold)} sd${chosen ? ' — chosen' : ''}.`;
}

function scale(): HTMLElement {
  const swatch = (density: number) => {
    const made = element('span', 'mapInk');
    made.style.setProperty('--density', `${density}%`);
    return made;
  };
  return element(
    'p',
    'mapScale',
    'skill 0 ',
    ...[0, 25, 50, 75, 100].map(swatch),
    ' 1; framed: chosen; crossed: not tried',
  );
}
