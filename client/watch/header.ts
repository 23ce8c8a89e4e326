import { button, element, mark, say } from '../dom.ts';
import type { PageState } from '../feedState.ts';
import { clockText, factsText } from '../words.ts';
import type { Attention } from './attention.ts';

/** The page's head: name, pages, switches of tone and notices, the hour and the line of facts. */
export interface Header {
  root: HTMLElement;
  update(state: PageState, today: number, lost: boolean): void;
}

/** Creates the head; `navigation` holds the links to the pages. */
export function createHeader(attention: Attention, navigation: HTMLElement, showKeys: () => void): Header {
  const hour = element('time', 'hour');
  const facts = element('p', 'facts');
  const tone = button('', 'quiet', () => attention.toggleTone().then(update));
  const notices = button('', 'quiet', () => attention.toggleNotices().then(update));
  const update = () => {
    toggleText(tone, 'Tone', attention.tone());
    toggleText(notices, 'Notices', attention.notices());
    notices.hidden = !attention.canNotify();
  };
  update();
  const keys = button('Keys ?', 'quiet', showKeys);
  mark(keys, 'aria-keyshortcuts', '?');
  return {
    root: element(
      'header',
      'head',
      element('h1', 'program', 'Foreshift'),
      navigation,
      element('div', 'switches', tone, notices, keys),
      element('div', 'today', hour, facts),
    ),
    update: (state, today, lost) => {
      say(hour, state.welcomed ? `${clockText(today)} UTC` : null);
      say(
        facts,
        state.welcomed
          ? factsText([...state.channels.values()], state.demo, today) + (lost ? ' (as last heard)' : '')
          : null,
      );
    },
  };
}

function toggleText(target: HTMLButtonElement, word: string, on: boolean): void {
  say(target, `${word} ${on ? 'on' : 'off'}`);
  mark(target, 'aria-pressed', String(on));
}
