import type { ChannelState } from '../../shared-types/channel.ts';
import type { ModelEvidence } from '../../shared-types/model.ts';
import type { WatchState } from '../../shared-types/watch.ts';
import { changes } from '../access/changes.ts';
import { button, element, mark, say } from '../dom.ts';
import { act } from '../requests.ts';
import { gradeSentence } from '../warningWords.ts';
import { whoIsHere } from '../watch/dialogs.ts';
import * as requests from './requests.ts';

/** What a person may do with a watch in each use, and the use it leads to. */
const STEPS: Record<WatchState['use'], [words: string, to: WatchState['use']][]> = {
  'in use': [
    ['Put on trial', 'on trial'],
    ['Take out of use', 'taken out of use'],
  ],
  'on trial': [
    ['Put in use', 'in use'],
    ['Take out of use', 'taken out of use'],
  ],
  'taken out of use': [
    ['Put in use', 'in use'],
    ['Put on trial', 'on trial'],
  ],
};

/** Which channels a model watches, its grade there, and the actions; `changed` runs after each that succeeded. */
export function createUses(
  model: ModelEvidence,
  watches: readonly WatchState[],
  channels: readonly ChannelState[],
  changed: () => void,
): HTMLElement {
  const fault = element('p', 'fault');
  mark(fault, 'role', 'alert');
  say(fault, null);
  const attempt = (doing: Promise<void>) =>
    doing.then(
      () => {
        say(fault, null);
        changed();
      },
      (error: Error) => say(fault, error.message),
    );
  const using = watches.filter((watch) => watch.model === model.name);
  const lines = using.map((watch) =>
    element(
      'div',
      'use',
      element(
        'p',
        '',
        element('strong', '', watch.channels.join(' + ')),
        ` · ${watch.use} · `,
        watch.use === 'taken out of use'
          ? `“${watch.name}” sees nothing.`
          : gradeSentence(watch, `“${watch.name}”`),
      ),
      element(
        'div',
        'buttons',
        ...(watch.rule === null || watch.trigger
          ? []
          : [
              changes(
                button(watch.latching ? 'No longer latch' : 'Latch', 'quiet', () =>
                  attempt(act(watch.watch, { action: 'latch', on: !watch.latching, by: whoIsHere() })),
                ),
              ),
            ]),
        ...STEPS[watch.use].map(([words, to]) =>
          changes(button(words, 'quiet', () => void attempt(requests.setUse(watch.watch, to)))),
        ),
      ),
    ),
  );
  if (lines.length === 0) lines.push(element('div', 'use', element('p', '', 'No channel uses it.')));
  return element(
    'section',
    'uses',
    ...lines,
    ...(model.channels.length === 1 ? [trialForm(model, channels, attempt)] : []),
    fault,
  );
}

/** Begins a watch on trial: it runs beside the one in use, asks nobody and is graded alike. */
function trialForm(
  model: ModelEvidence,
  channels: readonly ChannelState[],
  attempt: (doing: Promise<void>) => void,
): HTMLElement {
  const names = channels.map(({ channel }) => channel);
  const select = element('select');
  mark(select, 'aria-label', 'Channel to try it on');
  for (const name of names) {
    const option = element('option', '', name);
    option.value = name;
    select.append(option);
  }
  const own = model.channels[0]!.channel;
  if (names.includes(own)) select.value = own;
  const begin = button('Watch on trial', '', () =>
    attempt(
      requests.beginWatch({
        model: model.name,
        channels: [select.value],
        name: `${model.name}, trial`.slice(0, 80),
        use: 'on trial',
      }),
    ),
  );
  changes(begin);
  begin.disabled = names.length === 0;
  return element(
    'div',
    'tryOn',
    element('label', 'field', element('span', '', 'Channel'), select),
    begin,
    element(
      'p',
      'evidenceWords',
      'On trial it runs beside the watch in use, asks nobody and is graded alike.',
    ),
  );
}
