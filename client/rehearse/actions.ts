import type { PlayState, RehearsalResult } from '../../shared-types/rehearsal.ts';
import { changes } from '../access/changes.ts';
import { button, element, mark, say } from '../dom.ts';
import { capital } from '../words.ts';
import { choiceControl, createField } from './fields.ts';
import { playWatched } from './playWatched.ts';
import * as requests from './requests.ts';
import { whereText } from './text.ts';

/** What can be done with an answer. */
export interface Actions {
  root: HTMLElement;
  follow(row: number): void;
}

const PACES = [
  { value: '1', words: 'as it was recorded' },
  { value: '10', words: '10 times as fast' },
  { value: '100', words: '100 times as fast' },
  { value: 'max', words: 'as fast as it goes' },
];
/** Milliseconds between two looks at what is being played. */
const LOOK_EVERY = 1000;

/** Creates the actions of rehearsal `id`. */
export function createActions(id: string, result: RehearsalResult, unit: string): Actions {
  let row = result.chosenRow;
  const { settings, request, recordings, verdict } = result;
  const said = element('p', 'actionSaid');
  mark(said, 'role', 'status');
  const trouble = element('p', 'fieldFault');
  mark(trouble, 'role', 'alert');
  say(said, null);
  say(trouble, null);
  const complain = (error: Error) => say(trouble, error.message);

  const watch = button('Watch with these settings', 'first', () => {
    watch.disabled = true;
    say(trouble, null);
    const point = result.table.rows[row]!;
    requests
      .putIntoUse(id, row)
      .then(() => {
        const what = capital(request.channels.join(', '));
        const set = whereText(settings, point.threshold, unit);
        said.hidden = false;
        said.replaceChildren(
          `${what} is watched from now on: ${set}, window ${Number(settings.window.toPrecision(3))} s, rank ${settings.rank}. `,
          toWatch(),
        );
      })
      .catch(complain)
      .finally(() => {
        watch.disabled = false;
      });
  });
  changes(watch);
  const caution =
    verdict.kind === 'useful'
      ? null
      : element('span', 'fieldHelp', 'Mind the verdict above before you rely on it.');
  const play = playForm(result, () => row);
  const report = element('a', 'button', 'Report');
  report.href = requests.reportAddress(id);
  report.target = '_blank';
  report.rel = 'noopener';
  const figures = element('a', 'button', 'Figures as JSON');
  figures.href = requests.figuresAddress(id);
  figures.download = `rehearsal-${id}.json`;
  return {
    root: element(
      'section',
      'actions',
      element(
        'div',
        'buttons',
        watch,
        ...(recordings.every(({ name }) => name.startsWith('stored:')) ? [play.opener] : []),
        report,
        figures,
        ...(caution === null ? [] : [caution]),
      ),
      play.root,
      said,
      trouble,
    ),
    follow: (next) => {
      row = next;
    },
  };
}

function toWatch(): HTMLAnchorElement {
  const link = element('a', '', 'To the Watch page');
  link.href = '#/';
  return link;
}

function playForm(result: RehearsalResult, row: () => number): { opener: HTMLElement; root: HTMLElement } {
  const pace = choiceControl(PACES);
  pace.value = '10';
  const recording = choiceControl(
    result.recordings.map(({ name }) => ({
      value: name.replace(/^stored:/, ''),
      words: name.replace(/^stored:/, ''),
    })),
  );
  const watched = element('input');
  watched.type = 'checkbox';
  watched.checked = true;
  const fields = [
    createField(recording, { name: 'Recording', help: 'Sent anew with present times.' }),
    createField(pace, { name: 'Pace', help: 'How fast it is sent.' }),
  ];
  const run = changes(element('button', '', 'Play'));
  run.type = 'submit';
  const state = element('p', 'actionSaid');
  mark(state, 'role', 'status');
  const trouble = element('p', 'fieldFault');
  mark(trouble, 'role', 'alert');
  say(state, null);
  say(trouble, null);
  const form = element(
    'form',
    'playForm',
    ...fields.map(({ root }) => root),
    element('label', 'tick', watched, element('span', '', 'and watch it with these settings')),
    run,
  );
  const root = element('div', 'play', form, state, trouble);
  form.hidden = true;
  const opener = button('Play as live…', '', () => {
    form.hidden = !form.hidden;
    mark(opener, 'aria-expanded', String(!form.hidden));
    if (!form.hidden) recording.focus();
  });
  mark(opener, 'aria-expanded', 'false');

  const show = (play: PlayState) => {
    state.hidden = false;
    const name = play.as.join(', ');
    if (play.state === 'running') {
      const halt = button('Stop playing', '', () => {
        requests.stopPlay(play.id).catch((error: Error) => say(trouble, error.message));
      });
      state.replaceChildren(`Playing as “${name}”. `, toWatch(), ' ', changes(halt));
    } else if (play.state === 'failed')
      state.replaceChildren(`Playing “${name}” failed: ${play.fault ?? 'no reason was given'}`);
    else
      state.replaceChildren(
        `“${name}” was ${play.state === 'done' ? 'played to its end' : 'stopped'}. `,
        toWatch(),
      );
  };
  const follow = async (id: string) => {
    for (;;) {
      await new Promise((resolve) => setTimeout(resolve, LOOK_EVERY));
      // a page that lost its server says so above; it goes on asking
      const known = await requests.plays().catch(() => null);
      const play = known?.find((each) => each.id === id);
      if (known !== null && play === undefined) return;
      if (play === undefined) continue;
      show(play);
      if (play.state !== 'running') return;
    }
  };
  form.addEventListener('submit', (event) => {
    event.preventDefault();
    run.disabled = true;
    say(trouble, null);
    const begin = async () => {
      const play = await requests.play(recording.value, pace.value);
      show(play);
      void follow(play.id);
      if (watched.checked) await playWatched(result, row(), play.as);
    };
    begin()
      .catch((error: Error) => say(trouble, error.message))
      .finally(() => {
        run.disabled = false;
      });
  });
  return { opener, root };
}
