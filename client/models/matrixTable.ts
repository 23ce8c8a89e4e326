import { element, mark, say } from '../dom.ts';
import { inkOf } from './scales.ts';

const number = (value: number) => String(Number(value.toPrecision(3))).replace('-', '−');

/**
 * The coefficients of dv/dt = A v + B f as a picture: a cell's ink is its share of the largest magnitude, negative ones
 * are hatched; the number of a cell is told where one looks. Few coefficients are printed as numbers at once.
 *
 * @param A rows of rank − 1 numbers, 1/s
 * @param B rank − 1 numbers, 1/s
 */
export function matrixTable(A: readonly (readonly number[])[], B: readonly number[]): HTMLElement {
  const largest = Math.max(...A.flat().map(Math.abs), ...B.map(Math.abs), 0);
  const usual =
    'Ink: share of the largest; hatched: negative. Hover, or walk with the arrow keys, for the numbers.';
  const reading = element('p', 'evidenceWords');
  say(reading, usual);
  const few = B.length <= 5;
  const cells = A.map((row, i) =>
    [...row, B[i]!].map((value, k) => {
      const forcing = k === row.length;
      const cell = element('td', '', element('span', 'coefficient', few ? number(value) : ''));
      cell.tabIndex = i === 0 && k === 0 ? 0 : -1;
      cell.style.setProperty('--ink-share', `${Math.round(100 * inkOf(value, largest))}%`);
      mark(cell, 'data-negative', value < 0 ? 'yes' : null);
      mark(cell, 'data-dark', !few && inkOf(value, largest) > 0.55 ? 'yes' : null);
      mark(cell, 'data-forcing', forcing ? 'yes' : null);
      const words = `dv${sub(i + 1)}/dt: ${number(value)} per second times ${forcing ? 'the forcing' : `v${sub(k + 1)}`}`;
      mark(cell, 'aria-label', words);
      cell.addEventListener('pointerenter', () => say(reading, words));
      cell.addEventListener('focus', () => say(reading, words));
      return cell;
    }),
  );
  cells.forEach((row, i) => {
    row.forEach((cell, k) => {
      cell.addEventListener('keydown', (event) => {
        const [down, right] = STEPS[event.key] ?? [0, 0];
        const next = cells[i + down]?.[k + right];
        if (next === undefined || next === cell) return;
        event.preventDefault();
        cell.tabIndex = -1;
        next.tabIndex = 0;
        next.focus();
      });
    });
  });
  const head = (text: string, scope: 'col' | 'row') => {
    const made = element('th', '', text);
    made.scope = scope;
    return made;
  };
  const table = element(
    'table',
    'coefficients',
    element('caption', 'unseen', 'Coefficients of the linear model, rows dv/dt, columns v and the forcing'),
    element(
      'thead',
      '',
      element(
        'tr',
        '',
        element('td'),
        ...B.map((_, k) => head(`v${sub(k + 1)}`, 'col')),
        head('forcing', 'col'),
      ),
    ),
    element(
      'tbody',
      '',
      ...cells.map((row, i) => element('tr', '', head(`dv${sub(i + 1)}/dt`, 'row'), ...row)),
    ),
  );
  mark(table, 'data-few', few ? 'yes' : null);
  table.addEventListener('pointerleave', () => say(reading, usual));
  table.addEventListener('focusout', () => say(reading, usual));
  return element('div', '', element('div', 'tableScroll', table), reading);
}

const STEPS: Record<string, [number, number]> = {
  ArrowDown: [1, 0],
  ArrowUp: [-1, 0],
  ArrowRight: [0, 1],
  ArrowLeft: [0, -1],
};

const sub = (index: number) => String(index).replace(/\d/g, (digit) => '₀₁₂₃₄₅₆₇₈₉'[Number(digit)]!);
