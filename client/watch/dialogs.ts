import type { Warning } from '../../shared-types/warning.ts';
import { changes } from '../access/changes.ts';
import { button, element, mark, say } from '../dom.ts';
import { recall, remember } from '../remembered.ts';
import { act, models, sayActedOn, startWatch } from '../requests.ts';
import { actedText, howToWatch } from '../warningWords.ts';
import { clockText } from '../words.ts';

/** Who is at the page, as they last said; '' when they never did. */
export function whoIsHere(): string {
  return recall('by', '');
}

/** A dialog with a heading, opened; gone once it is closed. */
export function modal(title: string, ...children: Node[]): HTMLDialogElement {
  const heading = element('h2', '', title);
  const dialog = element('dialog', '', heading, ...children);
  heading.id = 'dialogTitle';
  mark(dialog, 'aria-labelledby', 'dialogTitle');
  dialog.addEventListener('close', () => dialog.remove());
  dialog.addEventListener('click', (event) => {
    if (event.target === dialog) dialog.close();
  });
  document.body.append(dialog);
  dialog.showModal();
  return dialog;
}

function field(words: string, input: HTMLElement): HTMLElement {
  return element('label', 'field', element('span', '', words), input);
}

const SHELF_TIMES: [string, string][] = [
  ['300', 'for 5 minutes'],
  ['900', 'for 15 minutes'],
  ['3600', 'for 1 hour'],
  ['28800', 'for 8 hours'],
  ['out', 'until somebody puts it back (out of service)'],
];

/** Asks for how long, why and by whom a watch is shelved, and does it. */
export function askToShelve(watch: string, name: string): void {
  const time = element('select');
  for (const [value, words] of SHELF_TIMES) time.append(new Option(words, value));
  time.value = '900';
  const reason = element('input');
  reason.required = true;
  reason.maxLength = 500;
  const by = element('input');
  by.maxLength = 80;
  by.value = whoIsHere();
  const fault = element('p', 'fault');
  say(fault, null);
  mark(fault, 'role', 'alert');
  const send = changes(element('button', 'first', 'Shelve'));
  const cancel = button('Cancel', '', () => dialog.close());
  const form = element(
    'form',
    '',
    field('How long', time),
    field('Why', reason),
    field('By whom', by),
    fault,
    element('p', 'buttons', send, cancel),
  );
  const note = element('p', 'note', 'While shelved its warnings are drawn and logged; nobody is called.');
  const dialog = modal(`Shelve ${name}`, note, form);
  reason.focus();
  form.addEventListener('submit', async (event) => {
    event.preventDefault();
    remember('by', by.value);
    send.disabled = true;
    try {
      const said = { reason: reason.value, by: by.value };
      await act(
        watch,
        time.value === 'out'
          ? { action: 'take out of service', ...said }
          : { action: 'shelve', seconds: Number(time.value), ...said },
      );
      dialog.close();
    } catch (error) {
      say(fault, error instanceof Error ? error.message : String(error));
    }
    send.disabled = false;
  });
}

/** Says that a warning was acted on, or takes it back. */
export function actedButton(warning: Warning, name: string): HTMLButtonElement {
  const words = warning.outcome === 'acted' ? 'not acted on…' : 'acted on…';
  const made = changes(button(words, 'quiet', () => askActedOn(warning, name)));
  mark(made, 'aria-label', `Warning of ${name} at ${clockText(warning.at, 1)}: ${words}`);
  return made;
}

/** Asks who acted on a warning and how, or whether that is to be taken back. */
function askActedOn(warning: Warning, name: string): void {
  const back = warning.outcome === 'acted';
  const what = element('input');
  what.maxLength = 500;
  const by = element('input');
  by.maxLength = 80;
  by.value = whoIsHere();
  const fault = element('p', 'fault');
  say(fault, null);
  mark(fault, 'role', 'alert');
  const send = changes(element('button', 'first', back ? 'Take it back' : 'It was acted on'));
  const form = element(
    'form',
    '',
    ...(back ? [] : [field('What was done', what)]),
    field('By whom', by),
    fault,
    element(
      'p',
      'buttons',
      send,
      button('Cancel', '', () => dialog.close()),
    ),
  );
  const note = element(
    'p',
    'note',
    back
      ? `${actedText(warning)}. Taken back, it is graded by what happened.`
      : 'A warning that was acted on is counted apart: what came after it says nothing about how good warnings are.',
  );
  const dialog = modal(`Warning of ${name} at ${clockText(warning.at)}`, note, form);
  (back ? by : what).focus();
  form.addEventListener('submit', async (event) => {
    event.preventDefault();
    remember('by', by.value);
    send.disabled = true;
    try {
      await sayActedOn(warning.id, { acted: !back, by: by.value, text: what.value });
      dialog.close();
    } catch (error) {
      say(fault, error instanceof Error ? error.message : String(error));
    }
    send.disabled = false;
  });
}

const KEYS: [string, string][] = [
  ['A', 'acknowledge the warning of the chosen strip, or the first one open'],
  ['S', 'shelve the chosen strip’s watch'],
  ['D', 'measure how late a warning of the chosen strip reaches you'],
  ['J K or ↓ ↑', 'next and previous strip'],
  ['← →', 'read values off the chosen strip'],
  ['+ −', 'show a shorter or longer time'],
  ['Escape', 'back to live'],
  ['?', 'this list'],
];

/** Shows what the keys do. */
export function showKeys(): void {
  const list = element('dl', 'keys');
  for (const [key, words] of KEYS) list.append(element('dt', '', key), element('dd', '', words));
  const mouse = element(
    'p',
    'note',
    'With the pointer: hovering reads values, dragging looks closely at a stretch, a double click returns to live.',
  );
  const dialog = modal(
    'Keys',
    list,
    mouse,
    element(
      'p',
      'buttons',
      button('Close', 'first', () => dialog.close()),
    ),
  );
}

/** Explains how a channel comes to be watched: by a model there is, or by the commands that make one. */
export function explainWatching(channel: string, has: 'nothing' | 'no rule'): void {
  const { fit, watch } = howToWatch(channel);
  const first =
    has === 'nothing'
      ? 'Fit a model to what this channel has recorded, saying what a switch is and how early it must be known:'
      : 'Its model was fitted without a watch rule. Fit it again, saying what a switch is and how early it must be known:';
  const ready = element('div', 'ready');
  const dialog = modal(
    `How to watch ${channel}`,
    ready,
    element('p', '', first),
    element('pre', '', fit),
    element('p', '', 'Then start the watch (with this server stopped):'),
    element('pre', '', watch),
    element(
      'p',
      'buttons',
      button('Close', 'first', () => dialog.close()),
    ),
  );
  void offerModels(channel, ready, () => dialog.close());
}

/** Offers the models with a watch rule for one channel, if there are any. */
async function offerModels(channel: string, host: HTMLElement, done: () => void): Promise<void> {
  const fitting = (await models().catch(() => [])).filter(
    (model) => model.channels.length === 1 && model.rule !== null,
  );
  if (fitting.length === 0) return;
  const choice = element('select');
  for (const model of fitting)
    choice.append(new Option(`${model.name} (fitted on ${model.channels[0]})`, model.name));
  const fault = element('p', 'fault');
  say(fault, null);
  const start = button('Watch with it', '', async () => {
    try {
      await startWatch({ model: choice.value, channels: [channel] });
      done();
    } catch (error) {
      say(fault, error instanceof Error ? error.message : String(error));
    }
  });
  host.append(field('A model there is', choice), element('p', 'buttons', changes(start)), fault);
}
