import type { ModelSummary } from '../../shared-types/model.ts';
import type { WatchState } from '../../shared-types/watch.ts';
import { element, mark } from '../dom.ts';
import { numberText, spanText } from '../words.ts';
import { inOrder, promiseLine, usesText } from './words.ts';

/** Which models are read: one, or two beside each other. */
export type Picked = readonly string[];

/** The picked ones after a click on a model: alone, or beside the one that is read (`beside`), or laid away. */
export function pick(picked: Picked, name: string, beside: boolean): Picked {
  if (!beside) return [name];
  if (picked.includes(name)) return picked.length > 1 ? picked.filter((each) => each !== name) : picked;
  return [...picked.slice(0, 1), name];
}

/** All models as a table: a click reads one, its box lays it beside the one that is read. */
export function modelList(
  models: readonly ModelSummary[],
  watches: readonly WatchState[],
  picked: Picked,
  choose: (picked: Picked) => void,
): HTMLElement {
  const heads = ['Model', 'Used by', 'Window', 'Rank', 'What rehearsal said', 'Fitted', 'Compare'].map(
    (text) => {
      const head = element('th', '', text);
      head.scope = 'col';
      return head;
    },
  );
  const rows = inOrder(models, watches).map((model) => {
    const read = element('button', 'modelName', model.name);
    read.type = 'button';
    read.addEventListener('click', () => choose(pick(picked, model.name, false)));
    mark(read, 'aria-pressed', String(picked.includes(model.name)));
    const name = element('th', '', read);
    name.scope = 'row';
    const box = element('input');
    box.type = 'checkbox';
    box.checked = picked.includes(model.name);
    box.disabled = picked.length === 1 && picked[0] === model.name;
    mark(box, 'aria-label', `Lay ${model.name} beside the one that is read`);
    box.addEventListener('change', () => choose(pick(picked, model.name, true)));
    const row = element(
      'tr',
      '',
      name,
      element('td', '', usesText(model.name, watches)),
      element('td', 'figure', spanText(Number((model.delays * model.interval).toPrecision(3)))),
      element('td', 'figure', numberText(model.rank, 0)),
      element('td', '', promiseLine(model.score, wordOf(model, watches)) ?? 'not rehearsed'),
      element('td', 'figure', model.fittedAt.slice(0, 10)),
      element('td', 'boxCell', box),
    );
    mark(row, 'data-read', picked.includes(model.name) ? 'yes' : null);
    return row;
  });
  return element(
    'div',
    'tableScroll',
    element(
      'table',
      'modelList',
      element('caption', 'unseen', 'Models, those in use first'),
      element('thead', '', element('tr', '', ...heads)),
      element('tbody', '', ...rows),
    ),
  );
}

const wordOf = ({ name }: ModelSummary, watches: readonly WatchState[]): string =>
  watches.find(({ model }) => model === name)?.switchWord ?? 'switch';
