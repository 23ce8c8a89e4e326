import { button, element, mark, say } from '../dom.ts';
import { stance } from '../strip/spoken.ts';
import { type PageView, type StripView, spokenFor } from '../strip/view.ts';
import { headline, phaseOf } from '../warningWords.ts';
import { clockText, spanText } from '../words.ts';
import type { Attention } from './attention.ts';
import { createFirstVisit } from './firstVisit.ts';
import { createHeader } from './header.ts';
import type { Strips } from './strips.ts';
import { createToday } from './today.ts';

/** The page around the strips; head, notices and caution stay when another page is shown in place of `body`. */
export interface Frame {
  body: HTMLElement;
  update(view: PageView, connected: boolean, unheard: number): void;
  /** says what could not be done */
  complain(error: unknown): void;
}

/** Mounts head, notices, strips, grades and the caution into `host`. */
export function createFrame(
  host: HTMLElement,
  strips: Strips,
  attention: Attention,
  navigation: HTMLElement,
  showKeys: () => void,
  trial: HTMLElement,
): Frame {
  const header = createHeader(attention, navigation, showKeys);
  const first = createFirstVisit();
  const today = createToday();
  const lost = element('p', 'notice lost');
  mark(lost, 'role', 'status');
  const trouble = element('p', 'notice trouble');
  mark(trouble, 'role', 'alert');
  const complaint = element('p', 'notice complaint');
  mark(complaint, 'role', 'alert');
  const zoomWords = element('span', '');
  const zoomed = element(
    'p',
    'notice zoomed',
    zoomWords,
    button('Back to live', 'quiet', () => strips.live()),
  );
  const announced = element('p', 'unseen');
  mark(announced, 'aria-live', 'polite');
  const askingWords = element('strong', '');
  const toWatch = element('a', '', 'To the Watch page');
  toWatch.href = '#/';
  const asking = element('p', 'notice asking', askingWords, toWatch);
  asking.hidden = true;
  for (const each of [lost, trouble, complaint]) say(each, null);
  zoomed.hidden = true;
  const notices = element('div', 'notices', lost, trouble, asking, complaint, trial, zoomed);
  const key = legend();
  const body = element('div', 'pageBody', first.root, strips.root, key, today.root);
  host.replaceChildren(header.root, notices, body, caution(), announced);
  return {
    body,
    update: (view, connected, unheard) => {
      header.update(view.state, view.today, view.lost);
      first.update(view.state);
      strips.tell();
      today.update(view.state, view.today);
      today.root.hidden = view.state.channels.size === 0;
      key.hidden = ![...view.state.watches.values()].some((watch) => watch.use === 'in use');
      say(lost, lostText(view, connected, unheard));
      say(
        trouble,
        view.state.trouble === null ? null : `What is shown is not being recorded: ${view.state.trouble}`,
      );
      mark(host, 'data-lost', view.lost ? 'yes' : null);
      const views = strips.views();
      // another page must not hide that a person is asked for
      const asked = body.hidden ? asks(views) : '';
      asking.hidden = asked === '';
      if (asked !== '') say(askingWords, asked);
      zoomed.hidden = view.zoom === null || body.hidden;
      const seen = views[0];
      if (view.zoom !== null && seen !== undefined)
        say(
          zoomWords,
          `A close look at ${clockText(seen.from)} to ${clockText(seen.to)}, ${spanText(seen.to - seen.from)}. Escape or a double click returns to live.`,
        );
      say(announced, announcement(views));
      announced.hidden = false;
    },
    complain: (error) => {
      say(complaint, error instanceof Error ? error.message : String(error));
      setTimeout(() => say(complaint, null), 12_000);
    },
  };
}

function lostText(view: PageView, connected: boolean, unheard: number): string | null {
  if (!view.state.welcomed)
    return connected || unheard < 2
      ? null
      : 'Foreshift’s server does not answer. Start it with npx foreshift watch; this page goes on trying.';
  if (!view.lost) return null;
  return `Foreshift’s server has not answered for ${spanText(Math.max(1, Math.floor(unheard)))}. What you see is old; trying again.`;
}

/** The open warnings that wait for a person, each as it stands now: "Loop A: reversal expected in 4 – 14 s". */
function asks(views: StripView[]): string {
  return views
    .flatMap((view) => {
      const warning = spokenFor(view);
      if (stance(view) !== 'asks' || warning === null || view.now === null) return [];
      const { what, when } = headline(warning, view.watch!, view.now);
      return [`▲ ${view.channel.channel}: ${what} ${when}`];
    })
    .join('; ');
}

/** What a screen reader is told: changes only with the warnings, never with the countdown. */
function announcement(views: StripView[]): string {
  const parts = views.flatMap((view) => {
    const warning = spokenFor(view);
    if (stance(view) !== 'asks' || warning === null || view.now === null) return [];
    const { what } = headline(warning, view.watch!, view.now);
    const span = `${clockText(warning.from)} until ${clockText(warning.to)}`;
    return [
      `${view.channel.channel}: ${what}, ${phaseOf(warning, view.now) === 'ahead' ? span : `at any moment until ${clockText(warning.to)}`}.`,
    ];
  });
  return parts.join(' ');
}

/** What the marks on the paper mean. */
function legend(): HTMLElement {
  const sign = (mark: string, className: string, words: string) =>
    element('span', '', element('b', className, mark), ` ${words}`);
  return element(
    'p',
    'legend',
    sign('▼', '', 'switch'),
    sign('', 'hatched', 'second regime'),
    sign('▲', 'red', 'warning issued'),
    sign('△', 'red', 'warning that came too late to speak'),
    sign('╌╌', 'red', 'threshold'),
    sign('┈┈', '', 're-arms below'),
  );
}

function caution(): HTMLElement {
  return element(
    'footer',
    'caution',
    element('strong', '', 'An aid to attention, not a safety function.'),
    ' Foreshift is no interlock, no trip and no protection layer; local codes and licensed practice govern.',
  );
}
