import type { ChannelState } from '../../shared-types/channel.ts';
import type { RehearsalState } from '../../shared-types/rehearsal.ts';
import { button, element, mark, say } from '../dom.ts';
import { createAnswer } from './answer.ts';
import { createForm } from './form.ts';
import { createEarlier, createProgress } from './progress.ts';
import * as requests from './requests.ts';

/** Milliseconds between two looks at a search, and at a server that does not answer. */
const LOOK_EVERY = 400;
const LOOK_AGAIN = 2000;

/** The Rehearse page: the question above, the search, the answer below. */
export function mountRehearse(host: HTMLElement): { visit(place: string): void } {
  let channels: ChannelState[] = [];
  let followed = '';
  let shown = '';
  const form = createForm((request) => {
    form.fault(null);
    form.busy(true);
    requests
      .start(request)
      .then((state) => {
        answer.replaceChildren();
        shown = '';
        progress.show(state);
        progress.root.scrollIntoView({ block: 'nearest' });
        location.hash = `#/rehearse/${encodeURIComponent(state.id)}`;
      })
      .catch((error: Error) => {
        form.busy(false);
        form.fault(error.message);
      });
  });
  const progress = createProgress((id) => {
    requests.stop(id).then(progress.show, (error: Error) => progress.lost(error.message));
  });
  const earlier = createEarlier();
  const answer = element('div', 'answerPlace');
  const broken = element('section', 'rehearseBroken');
  const empty = emptyState();
  broken.hidden = empty.hidden = true;
  const intro = element(
    'p',
    'intro',
    'How well would you have been warned? Say what a switch is and what notice is of use; settings are chosen on the earlier part of what was recorded and judged on the rest.',
  );
  const root = element(
    'main',
    'rehearse',
    intro,
    broken,
    empty,
    form.root,
    progress.root,
    answer,
    earlier.root,
  );
  host.replaceChildren(root);

  const load = async () => {
    try {
      const [known, stored, states] = await Promise.all([
        requests.channels(),
        requests.recordings(),
        requests.rehearsals(),
      ]);
      channels = known;
      broken.hidden = true;
      empty.hidden = stored.length > 0;
      form.root.hidden = intro.hidden = stored.length === 0;
      form.offer(known, stored);
      earlier.show(states, followed);
      await form.refreshLeftOut();
      mark(root, 'data-loaded', 'yes');
    } catch (error) {
      broken.hidden = false;
      broken.replaceChildren(
        element('h2', '', 'The recordings cannot be read.'),
        element('p', 'fieldFault', (error as Error).message),
        button('Try again', '', () => void load()),
      );
      empty.hidden = true;
      form.root.hidden = intro.hidden = channels.length === 0;
    }
  };
  const wait = (milliseconds: number) => new Promise((resolve) => setTimeout(resolve, milliseconds));

  const follow = async (id: string) => {
    followed = id;
    for (;;) {
      let state: RehearsalState;
      try {
        state = await requests.rehearsal(id);
        progress.lost(null);
      } catch (error) {
        if (followed !== id) return;
        progress.lost((error as Error).message);
        if (/^The server answered|no rehearsal/i.test((error as Error).message)) {
          form.busy(false);
          return unknown((error as Error).message);
        }
        await wait(LOOK_AGAIN);
        continue;
      }
      if (followed !== id) return;
      progress.show(state);
      form.busy(state.state === 'running');
      if (state.state !== 'running') return await ended(state);
      await wait(LOOK_EVERY);
    }
  };
  const unknown = (sentence: string) => {
    progress.show(null);
    answer.replaceChildren(element('p', 'fieldFault', sentence));
  };
  const ended = async (state: RehearsalState) => {
    requests.rehearsals().then(
      (states) => earlier.show(states, state.id),
      () => undefined,
    );
    if (state.state !== 'done' || shown === state.id) return;
    try {
      const result = await requests.result(state.id);
      if (followed !== state.id) return;
      shown = state.id;
      const unit = channels.find(({ channel }) => channel === result.request.channels[0])?.unit ?? '';
      const made = createAnswer(state.id, result, unit);
      answer.replaceChildren(made);
      const heading = made.querySelector<HTMLElement>('h2')!;
      heading.focus({ preventScroll: true });
      made.scrollIntoView({ block: 'start' });
    } catch (error) {
      if (followed === state.id) unknown((error as Error).message);
    }
  };

  let loaded: Promise<void> | null = null;
  return {
    visit: (place) => {
      loaded = load();
      if (place === '') {
        followed = '';
        return;
      }
      if (place === followed && (shown === place || !progress.root.hidden)) return;
      if (shown !== place) answer.replaceChildren();
      void loaded.then(() => follow(place));
    },
  };
}

function emptyState(): HTMLElement {
  const code = (text: string) => element('code', '', text);
  const play = element('pre', '');
  say(play, `npx foreshift play RECORDING.csv --times recorded --pace max --to ws://${location.host}/ingest`);
  return element(
    'section',
    'firstVisit',
    element('h2', '', 'Nothing has been recorded yet.'),
    element(
      'p',
      '',
      'A rehearsal runs over what a channel has recorded. Everything that is connected is recorded by itself; a file is read in with its own times by this command, and then this page offers it:',
    ),
    play,
    element(
      'p',
      'note',
      'RECORDING.csv has a column of times and one for each channel. To try it without data of your own, ',
      code('npm start'),
      ' runs the demo, whose simulated loops are recorded from the first second.',
    ),
  );
}
