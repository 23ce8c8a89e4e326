import type { ChannelState } from '../../shared-types/channel.ts';
import { changes } from '../access/changes.ts';
import { element, mark, say } from '../dom.ts';
import { recall, remember } from '../remembered.ts';
import { addNote } from './requests.ts';

/** The line in which a note is written. */
export interface NoteForm {
  root: HTMLElement;
  know(channels: readonly ChannelState[]): void;
  focus(): void;
}

/** Creates it. A note that could not be stored stays in the field. */
export function createNoteForm(): NoteForm {
  const text = element('input');
  text.maxLength = 2000;
  text.required = true;
  mark(text, 'aria-keyshortcuts', 'n');
  const channel = element('select');
  channel.append(new Option('no channel', ''));
  const by = element('input');
  by.maxLength = 80;
  by.value = recall('by', '');
  mark(by, 'autocomplete', 'name');
  const add = changes(element('button', '', 'Add note'));
  const said = element('p', 'noteSaid');
  mark(said, 'role', 'status');
  const fault = element('p', 'fault');
  mark(fault, 'role', 'alert');
  say(fault, null);
  const field = (words: string, className: string, input: HTMLElement) =>
    element('label', `field ${className}`, element('span', '', words), input);
  const root = element(
    'form',
    'noteForm',
    field('Note', 'noteText', text),
    field('Of channel', '', channel),
    field('By', '', by),
    add,
    said,
    fault,
  );
  mark(root, 'aria-label', 'Add a note');
  root.addEventListener('submit', async (event) => {
    event.preventDefault();
    if (text.value.trim() === '') {
      say(fault, 'The note has no words yet; write what happened.');
      text.focus();
      return;
    }
    remember('by', by.value);
    add.disabled = true;
    say(fault, null);
    try {
      await addNote({ text: text.value, by: by.value, channel: channel.value === '' ? null : channel.value });
      text.value = '';
      say(said, 'Noted.');
      setTimeout(() => say(said, null), 4000);
    } catch (error) {
      say(fault, error instanceof Error ? error.message : String(error));
    }
    add.disabled = false;
    text.focus();
  });
  return {
    root,
    know: (channels) => {
      const chosen = channel.value;
      channel.replaceChildren(
        new Option('no channel', ''),
        ...channels.map(({ channel: name }) => new Option(name, name)),
      );
      channel.value = chosen;
    },
    focus: () => text.focus(),
  };
}
