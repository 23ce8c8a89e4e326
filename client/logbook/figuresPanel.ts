import type { WarningTimes } from '../../shared-types/logbook.ts';
import type { WatchState } from '../../shared-types/watch.ts';
import { element, mark, say } from '../dom.ts';
import { figuresOf } from './figures.ts';
import { callSentences, factsOf, SOURCES } from './figuresWords.ts';

/** The summary of how often somebody is called, beside what the standards call acceptable. */
export interface FiguresPanel {
  root: HTMLElement;
  show(times: WarningTimes, watches: readonly WatchState[]): void;
  /** says why there are no figures */
  fail(sentence: string): void;
}

/** Creates the summary. */
export function createFiguresPanel(): FiguresPanel {
  const sentences = element('div', 'callSentences', element('p', 'quietLine', 'Counting …'));
  const body = element('tbody');
  const table = element(
    'table',
    'figures',
    element('caption', 'unseen', 'Figures of the alarm standards'),
    element('thead', '', element('tr', '', ...['Figure', 'Here', 'Standards'].map(columnHead))),
    body,
  );
  table.hidden = true;
  const sources = element('p', 'sources', SOURCES);
  const title = element('h2', 'since', 'How often people are called');
  title.id = 'callTitle';
  const root = element(
    'section',
    'calls',
    title,
    sentences,
    element('details', '', element('summary', '', 'Figures of the alarm standards'), table, sources),
  );
  mark(root, 'aria-labelledby', 'callTitle');
  return {
    root,
    show: (times, watches) => {
      const figures = figuresOf(times);
      const shelved = watches.filter(({ state }) => state === 'shelved').length;
      const nameOf = (id: string) => watches.find(({ watch }) => watch === id)?.name ?? id;
      const facts = factsOf(figures, shelved, nameOf);
      const beyond = facts.filter((fact) => fact.beyond);
      sentences.replaceChildren(...callSentences(figures).map((text) => element('p', 'sentence', text)));
      if (beyond.length > 0)
        sentences.append(
          element(
            'p',
            'sentence beyond',
            `▲ Beyond what the standards call acceptable: ${beyond.map(({ name, figure }) => `${name.toLowerCase()}, ${figure}`).join('; ')}.`,
          ),
        );
      body.replaceChildren(
        ...facts.map((fact) => {
          const name = element('th', '', fact.name);
          name.scope = 'row';
          const row = element(
            'tr',
            '',
            name,
            element('td', 'figure', fact.beyond ? `▲ ${fact.figure}` : fact.figure),
            element('td', '', fact.standard),
          );
          mark(row, 'data-beyond', fact.beyond ? 'yes' : null);
          return row;
        }),
      );
      table.hidden = false;
    },
    fail: (sentence) => {
      const fault = element('p', 'quietLine');
      say(fault, sentence);
      sentences.replaceChildren(fault);
    },
  };
}

function columnHead(words: string): HTMLElement {
  const made = element('th', '', words);
  made.scope = 'col';
  return made;
}
