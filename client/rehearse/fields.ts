import { element, mark, say } from '../dom.ts';

/** A field of the form: its name, the control, its unit, a line of help, and what is wrong with it. */
export interface Field<C extends HTMLElement> {
  root: HTMLElement;
  control: C;
  /** a sentence beside the field; null: nothing is wrong */
  fault(sentence: string | null): void;
}

export interface FieldWords {
  name: string;
  help: string;
  unit?: string;
}

let fields = 0;

/** Puts a control into a field with its name, unit and help. */
export function createField<C extends HTMLElement>(control: C, { name, help, unit }: FieldWords): Field<C> {
  const key = `field${++fields}`;
  control.id = key;
  const label = element('label', 'fieldName', name);
  label.htmlFor = key;
  const helpLine = element('p', 'fieldHelp', help);
  helpLine.id = `${key}Help`;
  const faultLine = element('p', 'fieldFault');
  faultLine.id = `${key}Fault`;
  say(faultLine, null);
  mark(control, 'aria-describedby', `${key}Help`);
  const box =
    unit === undefined || unit === ''
      ? control
      : element('span', 'withUnit', control, element('span', 'unit', unit));
  return {
    root: element('div', 'rehearseField', label, box, helpLine, faultLine),
    control,
    fault: (sentence) => {
      say(faultLine, sentence);
      mark(control, 'aria-invalid', sentence === null ? null : 'true');
      mark(control, 'aria-describedby', sentence === null ? `${key}Help` : `${key}Help ${key}Fault`);
    },
  };
}

/** A line to write on; numbers get the keys for numbers. */
export function textControl(kind: 'text' | 'number' | 'rule' = 'text'): HTMLInputElement {
  const input = element('input', { text: '', number: 'numeric', rule: 'rule' }[kind]);
  input.type = 'text';
  input.autocomplete = 'off';
  input.spellcheck = false;
  if (kind === 'number') input.inputMode = 'decimal';
  return input;
}

/** A choice of words. */
export function choiceControl(choices: readonly { value: string; words: string }[]): HTMLSelectElement {
  const select = element('select');
  offer(select, choices);
  return select;
}

/** Offers other choices and keeps the one that is made, where it is still among them. */
export function offer(select: HTMLSelectElement, choices: readonly { value: string; words: string }[]): void {
  const kept = select.value;
  select.replaceChildren(
    ...choices.map(({ value, words }) => {
      const option = element('option', '', words);
      option.value = value;
      return option;
    }),
  );
  if (choices.some(({ value }) => value === kept)) select.value = kept;
}
