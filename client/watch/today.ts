import { element, mark, say } from '../dom.ts';
import type { PageState } from '../feedState.ts';
import { acknowledgedText, gradeSentence, nobodyAsked, outcomeText, settledText } from '../warningWords.ts';
import { clockText, minuteText } from '../words.ts';
import { actedButton } from './dialogs.ts';

/** Below the strips: today's grade beside what rehearsal promised, and the last warnings with what became of them. */
export interface Today {
  root: HTMLElement;
  update(state: PageState, today: number): void;
}

const ROWS = 12;

/** Creates the lower part of the page. */
export function createToday(): Today {
  const since = element('h2', 'since');
  const sentences = element('div', 'sentences');
  const body = element('tbody');
  const heads = ['Time', 'Channel', 'What became of it', 'Acknowledged', 'Span or lead', ''].map((text) => {
    const head = element('th', '', text);
    head.scope = 'col';
    return head;
  });
  const table = element(
    'table',
    'last',
    element('caption', 'unseen', 'The last warnings, newest first'),
    element('thead', '', element('tr', '', ...heads)),
    body,
  );
  const none = element('p', 'none', 'No warning yet.');
  let known: PageState | null = null;
  let day = -1;
  /** a row stays the same element while it says the same: somebody may be at its button */
  let rows = new Map<number, { says: string; row: HTMLTableRowElement }>();
  const rowFor = (state: PageState, id: number, today: number) => {
    const warning = state.warnings.get(id)!;
    const trigger = state.watches.get(warning.watch)?.trigger;
    const says = JSON.stringify([warning, nameOf(state, warning.watch), trigger, Math.floor(today / 86400)]);
    const before = rows.get(id);
    return before?.says === says ? before : { says, row: rowOf(state, id, today) };
  };
  return {
    root: element('section', 'grades', since, element('div', 'gradeWords', sentences, table, none)),
    update: (state, today) => {
      if (
        known !== null &&
        known.watches === state.watches &&
        known.warnings === state.warnings &&
        day === Math.floor(today / 86400)
      )
        return;
      known = state;
      day = Math.floor(today / 86400);
      const watches = [...state.watches.values()].filter(
        (watch) => watch.use === 'in use' && watch.rule !== null,
      );
      const starts = watches.map((watch) => watch.heardSince).filter((time) => time !== null);
      say(since, starts.length > 0 ? `Since ${minuteText(Math.min(...starts), today)}` : 'So far');
      const words = watches.map((watch) => gradeSentence(watch, nameOf(state, watch.watch)));
      if (words.length === 0) words.push('No watch is in use.');
      sentences.replaceChildren(...words.map((text) => element('p', 'sentence', text)));
      mark(sentences, 'data-many', words.length > 4 ? 'yes' : null);
      const last = [...state.warnings.values()]
        .sort((a, b) => b.madeAt - a.madeAt || b.id - a.id)
        .slice(0, ROWS);
      table.hidden = last.length === 0;
      none.hidden = last.length > 0;
      rows = new Map(last.map(({ id }) => [id, rowFor(state, id, today)]));
      const wanted = [...rows.values()].map(({ row }) => row);
      if (wanted.length !== body.children.length || wanted.some((row, i) => row !== body.children[i]))
        putInOrder(body, wanted);
    },
  };
}

/** Makes these rows the children of a table's body, moving none that is in its place: one that has the focus keeps it. */
function putInOrder(body: HTMLElement, rows: readonly HTMLElement[]): void {
  const kept = new Set<Element>(rows);
  for (const child of [...body.children]) if (!kept.has(child)) child.remove();
  rows.forEach((row, i) => {
    if (body.children[i] !== row) body.insertBefore(row, body.children[i] ?? null);
  });
}

/** What a watch is called on the page: by its channel where that is unmistakable. */
export function nameOf(state: PageState, watch: string): string {
  const known = state.watches.get(watch);
  if (known === undefined) return watch;
  const first = known.channels[0] ?? known.name;
  const others = [...state.watches.values()].filter(
    (each) => each.use === 'in use' && each.channels[0] === first,
  );
  return others.length > 1 ? known.name : first;
}

function rowOf(state: PageState, id: number, today: number): HTMLTableRowElement {
  const warning = state.warnings.get(id)!;
  const watch = state.watches.get(warning.watch);
  const waits =
    warning.outcome === 'open' && warning.acknowledgedAt === null && nobodyAsked(warning, watch) === false;
  const another = warning.at > 1e8 && Math.floor(warning.at / 86400) !== Math.floor(today / 86400);
  const time = another ? minuteText(warning.at, today) : clockText(warning.at, 1);
  const row = element(
    'tr',
    '',
    element('td', '', time),
    element('td', '', nameOf(state, warning.watch)),
    element('td', 'outcome', waits ? '▲ open' : outcomeText(warning)),
    element('td', '', acknowledgedText(warning, watch)),
    element('td', '', settledText(warning, watch)),
    element('td', '', actedButton(warning, nameOf(state, warning.watch))),
  );
  mark(row, 'data-waits', waits ? 'yes' : null);
  mark(row, 'data-outcome', warning.outcome);
  return row;
}
