import type { RehearsalState } from '../../shared-types/rehearsal.ts';
import { changes } from '../access/changes.ts';
import { button, element, mark, say } from '../dom.ts';
import { capital } from '../words.ts';
import { leftText, requestText } from './text.ts';

/** A search at work, stopped or failed. */
export interface Progress {
  root: HTMLElement;
  /** null: nothing is going on */
  show(state: RehearsalState | null): void;
  /** the server does not answer */
  lost(sentence: string | null): void;
}

/** Creates it; `stop` runs when the search is to be stopped. */
export function createProgress(stop: (id: string) => void): Progress {
  let shown: RehearsalState | null = null;
  const doing = element('p', 'doing');
  mark(doing, 'role', 'status');
  const asked = element('p', 'asked');
  const fill = element('span', 'barFill');
  const bar = element('div', 'bar', fill);
  mark(bar, 'role', 'progressbar');
  mark(bar, 'aria-valuemin', '0');
  mark(bar, 'aria-valuemax', '100');
  mark(bar, 'aria-label', 'Progress of the rehearsal');
  const halt = button('Stop', '', () => {
    if (shown !== null) stop(shown.id);
  });
  changes(halt);
  const trouble = element('p', 'fieldFault');
  say(trouble, null);
  const root = element('section', 'progress', asked, element('div', 'barRow', bar, halt), doing, trouble);
  root.hidden = true;
  return {
    root,
    show: (state) => {
      shown = state;
      root.hidden = state === null || state.state === 'done';
      if (state === null) return;
      say(asked, requestText(state.request));
      const running = state.state === 'running';
      const percent = Math.floor(100 * state.done);
      bar.hidden = halt.hidden = !running;
      fill.style.width = `${(100 * state.done).toFixed(1)}%`;
      mark(bar, 'aria-valuenow', String(percent));
      mark(root, 'data-state', state.state);
      const left = leftText(state.secondsLeft);
      if (running) say(doing, `${percent} %: ${state.doing}${left === '' ? '' : `, ${left}`}`);
      else if (state.state === 'stopped')
        say(doing, `Stopped at ${percent} %. Nothing was found: what was half done is not shown.`);
      else if (state.state === 'failed')
        say(doing, `This could not be rehearsed: ${asSentence(state.fault ?? 'no reason was given')}`);
    },
    lost: (sentence) => {
      say(trouble, sentence);
      mark(root, 'data-lost', sentence === null ? null : 'yes');
    },
  };
}

function endWords({ state, verdict }: RehearsalState): string {
  if (state !== 'done' || verdict === null) return state;
  return verdict.than === null ? verdict.kind : `${verdict.kind} ${verdict.than}`;
}

function asSentence(text: string): string {
  return /[.!?]$/.test(text) ? text : `${text}.`;
}

/** Rehearsals so far, newest first, to be opened again. */
export function createEarlier(): {
  root: HTMLElement;
  show(states: readonly RehearsalState[], here: string): void;
} {
  const list = element('ul', 'earlierList');
  const root = element('section', 'earlier', element('h3', '', 'Rehearsals so far'), list);
  root.hidden = true;
  return {
    root,
    show: (states, here) => {
      root.hidden = states.length === 0;
      const newest = [...states].sort((a, b) => b.startedAt - a.startedAt);
      list.replaceChildren(
        ...newest.map((state) => {
          const link = element('a', '', requestText(state.request));
          link.href = `#/rehearse/${encodeURIComponent(state.id)}`;
          if (state.id === here) mark(link, 'aria-current', 'true');
          return element('li', '', element('b', '', capital(endWords(state))), ' ', link);
        }),
      );
    },
  };
}
