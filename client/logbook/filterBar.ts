import type { ChannelState } from '../../shared-types/channel.ts';
import type { WatchState } from '../../shared-types/watch.ts';
import { button, element, mark, say } from '../dom.ts';
import { EVERYTHING, type Filter, faultOf, KINDS, letsAllThrough, SPANS } from './filter.ts';

/** The fields by which the lines are filtered. */
export interface FilterBar {
  root: HTMLElement;
  set(filter: Filter): void;
  /** names to choose from */
  know(channels: readonly ChannelState[], watches: readonly WatchState[]): void;
  focusText(): void;
}

/** Waiting for a pause in typing, milliseconds. */
const TYPING = 300;

/** Creates the fields; `changed` is told each filter that can be meant. */
export function createFilterBar(changed: (filter: Filter) => void): FilterBar {
  let filter = EVERYTHING;
  let typing: ReturnType<typeof setTimeout> | undefined;
  const channel = element('select');
  const watch = element('select');
  const span = element('select');
  for (const [value, words] of SPANS) span.append(new Option(words, value));
  const text = element('input');
  text.type = 'search';
  text.placeholder = 'any words';
  mark(text, 'aria-keyshortcuts', '/');
  const [from, to] = [element('input'), element('input')];
  for (const field of [from, to]) field.type = 'datetime-local';
  const range = element('div', 'logRange', labelled('From (UTC)', from), labelled('To (UTC)', to));
  const boxes = KINDS.map(({ id, name }) => {
    const box = element('input');
    box.type = 'checkbox';
    box.value = id;
    return { id, box, label: element('label', 'logKindBox', box, name) };
  });
  const kinds = element(
    'fieldset',
    'logKinds',
    element('legend', 'unseen', 'Only these kinds of lines; none chosen: all'),
    element('span', 'logOnly', 'Only'),
    ...boxes.map(({ label }) => label),
  );
  const fault = element('p', 'fault');
  mark(fault, 'role', 'alert');
  say(fault, null);
  const all = button('Show everything', 'quiet', () => apply(EVERYTHING));

  const show = () => {
    choose(channel, filter.channel);
    choose(watch, filter.watch);
    span.value = filter.span;
    if (document.activeElement !== text) text.value = filter.text;
    from.value = filter.from;
    to.value = filter.to;
    range.hidden = filter.span !== 'range';
    for (const { id, box } of boxes) box.checked = filter.kinds.has(id);
    all.hidden = letsAllThrough(filter);
    say(fault, faultOf(filter));
  };
  const apply = (next: Filter) => {
    filter = next;
    if (next === EVERYTHING) text.value = '';
    show();
    if (faultOf(filter) === null) changed(filter);
  };
  const read = () =>
    apply({
      channel: channel.value,
      watch: watch.value,
      span: span.value,
      text: text.value,
      from: from.value,
      to: to.value,
      kinds: new Set(boxes.filter(({ box }) => box.checked).map(({ id }) => id)),
    });
  const root = element(
    'form',
    'logFilter',
    labelled('Channel', channel),
    labelled('Watch', watch),
    labelled('When', span),
    range,
    labelled('Text', text),
    kinds,
    all,
    fault,
  );
  mark(root, 'role', 'search');
  mark(root, 'aria-label', 'Filter of the logbook');
  root.addEventListener('submit', (event) => {
    event.preventDefault();
    read();
  });
  root.addEventListener('change', (event) => {
    if (event.target !== text) read();
  });
  text.addEventListener('input', () => {
    clearTimeout(typing);
    typing = setTimeout(read, TYPING);
  });
  fill(channel, 'all channels', []);
  fill(watch, 'all watches', []);
  show();
  return {
    root,
    set: (next) => {
      filter = next;
      text.value = next.text;
      show();
    },
    know: (channels, watches) => {
      fill(
        channel,
        'all channels',
        channels.map(({ channel: name }) => [name, name]),
      );
      fill(
        watch,
        'all watches',
        watches.map(({ watch: id, name }) => [id, name]),
      );
      show();
    },
    focusText: () => text.focus(),
  };
}

function labelled(words: string, field: HTMLElement): HTMLElement {
  return element('label', 'field', element('span', '', words), field);
}

function fill(select: HTMLSelectElement, all: string, options: [string, string][]): void {
  select.replaceChildren(new Option(all, ''), ...options.map(([value, words]) => new Option(words, value)));
}

/** Chooses a value, also one that is not among the choices any more. */
function choose(select: HTMLSelectElement, value: string): void {
  if (![...select.options].some((option) => option.value === value)) select.append(new Option(value, value));
  select.value = value;
}
