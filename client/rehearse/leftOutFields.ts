import type { Condition, Mark, NewMark, StoredCondition } from '../../shared-types/rehearsal.ts';
import { changes } from '../access/changes.ts';
import { button, element, mark, say } from '../dom.ts';
import { recall } from '../remembered.ts';
import { clockText, minuteText, spanText } from '../words.ts';
import { choiceControl, createField, offer, textControl } from './fields.ts';
import { numberOf } from './formCheck.ts';
import * as requests from './requests.ts';
import { short } from './text.ts';
import { momentField, momentOf } from './timeText.ts';

/** What must not count: stretches of the channel, and conditions on other channels. */
export interface LeftOutFields {
  root: HTMLElement;
  /** of which channel, and between which times (s) its chosen recordings lie */
  of(channel: string, from: number, to: number, others: readonly { name: string; unit: string }[]): void;
  /** fills in a stretch that was drawn, and leads there */
  stretch(from: number, to: number): void;
  /** stretches of the channel that are left out now, `to` infinite until somebody ends it */
  marks(): { from: number; to: number; why: string }[];
  refresh(): Promise<void>;
}

const REASONS = [
  { value: 'start-up', words: 'start-up' },
  { value: 'calibration', words: 'calibration' },
  { value: 'touched', words: 'somebody touched it' },
  { value: 'other', words: 'another reason' },
];

/** Creates the fields; `changed` runs whenever something else is left out. */
export function createLeftOutFields(changed: () => void): LeftOutFields {
  let channel = '';
  let [begin, end] = [0, 0];
  let all: Mark[] = [];
  let stored: StoredCondition[] = [];
  const list = element('ul', 'leftOutList');
  const none = element('p', 'fieldHelp', 'Nothing is left out.');
  const trouble = element('p', 'fieldFault');
  mark(trouble, 'role', 'alert');
  say(trouble, null);

  const doIt = (run: () => Promise<unknown>) => {
    say(trouble, null);
    run()
      .then(refresh)
      .then(changed)
      .catch((error: Error) => say(trouble, error.message));
  };
  const refresh = async () => {
    [all, stored] = await Promise.all([requests.marks(), requests.conditions()]);
    show();
  };
  const here = () => all.filter((each) => each.channel === channel);
  const show = () => {
    const items = [
      ...here()
        .filter(({ from, to }) => from <= end && (to ?? Infinity) >= begin)
        .map((each) => item(markText(each, begin), () => requests.removeMark(each.id))),
      ...stored
        .filter((each) => each.channel === channel)
        .map((each) => item(conditionText(each), () => requests.removeCondition(each.id))),
    ];
    list.replaceChildren(...items);
    none.hidden = items.length > 0;
  };
  const item = (words: string, remove: () => Promise<unknown>) => {
    const take = changes(button('Remove', 'quiet', () => doIt(remove)));
    mark(take, 'aria-label', `Remove: ${words}`);
    return element('li', '', element('span', '', words), take);
  };

  const stretch = stretchForm(
    () => ({ begin, end }),
    (made) => doIt(() => requests.addMark({ ...made, channel, by: recall('by', '') })),
  );
  const condition = conditionForm((made) => doIt(() => requests.addCondition({ ...made, channel })));
  const stretchDetails = element('details', '', element('summary', '', 'Leave out a stretch'), stretch.root);
  const conditionDetails = element(
    'details',
    '',
    element('summary', '', 'Leave out by another channel'),
    condition.root,
  );
  return {
    root: element('div', 'leftOut', none, list, trouble, stretchDetails, conditionDetails),
    of: (name, from, to, others) => {
      channel = name;
      [begin, end] = [from, to];
      condition.offer(others);
      conditionDetails.hidden = others.length === 0;
      show();
    },
    stretch: (from, to) => {
      stretchDetails.open = true;
      stretch.fill(from, to);
    },
    marks: () => here().map(({ from, to, why }) => ({ from, to: to ?? Infinity, why })),
    refresh,
  };
}

function markText({ from, to, why, text, by }: Mark, today: number): string {
  const until = to === null ? 'until somebody ends it' : `to ${clockText(to)}, ${spanText(to - from)}`;
  const day = from < 1e8 ? clockText(from) : `${minuteText(from, today)}${clockText(from).slice(5)}`;
  const reason = why === 'touched' ? 'touched' : why;
  return `${reason}${text === '' ? '' : ` (${text})`}: ${day} ${until}${by === '' ? '' : `, by ${by}`}`;
}

function conditionText({ when, side, level }: Condition): string {
  return `while ${when} is ${side} ${short(level)}`;
}

type Stretch = Pick<NewMark, 'from' | 'to' | 'why' | 'text'>;

function stretchForm(range: () => { begin: number; end: number }, add: (made: Stretch) => void) {
  const from = textControl();
  const to = textControl();
  const why = choiceControl(REASONS);
  const note = textControl();
  const fields = {
    from: createField(from, { name: 'From', help: 'Time of day (UTC), or seconds where time is elapsed.' }),
    to: createField(to, { name: 'Until', help: 'Draw over the signal and both are filled in.' }),
    why: createField(why, { name: 'Why', help: 'Kept with the stretch, and shown in the report.' }),
    note: createField(note, { name: 'In words', help: 'If there is more to say.' }),
  };
  const form = element(
    'form',
    'smallForm',
    ...Object.values(fields).map(({ root }) => root),
    submit('Leave out this stretch'),
  );
  form.noValidate = true;
  form.addEventListener('submit', (event) => {
    event.preventDefault();
    const { begin, end } = range();
    const first = momentOf(from.value, begin, end);
    const last = momentOf(to.value, begin, end);
    const wrong = (text: string) =>
      `“${text.trim()}” is no time; write it as ${momentField(begin, begin, end)}, say.`;
    fields.from.fault(first === null ? wrong(from.value) : null);
    fields.to.fault(
      last === null
        ? wrong(to.value)
        : first !== null && last <= first
          ? 'The end must come after the beginning.'
          : null,
    );
    if (first === null || last === null || last <= first) {
      (first === null ? from : to).focus();
      return;
    }
    add({ from: first, to: last, why: why.value as NewMark['why'], text: note.value.trim() });
    from.value = to.value = note.value = '';
  });
  return {
    root: form,
    fill: (first: number, last: number) => {
      const { begin, end } = range();
      from.value = momentField(first, begin, end);
      to.value = momentField(last, begin, end);
      fields.from.fault(null);
      fields.to.fault(null);
      why.focus({ preventScroll: false });
    },
  };
}

function conditionForm(add: (made: Omit<Condition, 'channel'>) => void) {
  const when = choiceControl([]);
  const side = choiceControl([
    { value: 'above', words: 'above' },
    { value: 'below', words: 'below' },
  ]);
  const level = textControl('number');
  const whenField = createField(when, { name: 'While', help: 'Another channel, such as a valve or a bath.' });
  const sideField = createField(side, { name: 'is', help: 'On which side nothing counts.' });
  const levelField = createField(level, { name: 'this level', help: 'In that channel’s unit.', unit: ' ' });
  let units = new Map<string, string>();
  const showUnit = () => {
    const shown = levelField.root.querySelector<HTMLElement>('.unit');
    if (shown !== null) shown.textContent = units.get(when.value) ?? '';
  };
  when.addEventListener('change', showUnit);
  const form = element(
    'form',
    'smallForm',
    whenField.root,
    sideField.root,
    levelField.root,
    submit('Leave out meanwhile'),
  );
  form.noValidate = true;
  form.addEventListener('submit', (event) => {
    event.preventDefault();
    const value = numberOf(level.value);
    levelField.fault(Number.isFinite(value) ? null : `“${level.value.trim()}” is no number; write a level.`);
    if (!Number.isFinite(value)) return level.focus();
    add({ when: when.value, side: side.value as Condition['side'], level: value });
    level.value = '';
  });
  return {
    root: form,
    offer: (others: readonly { name: string; unit: string }[]) => {
      units = new Map(others.map(({ name, unit }) => [name, unit]));
      offer(
        when,
        others.map(({ name }) => ({ value: name, words: name })),
      );
      showUnit();
    },
  };
}

function submit(text: string): HTMLButtonElement {
  const made = element('button', '', text);
  made.type = 'submit';
  return changes(made);
}
