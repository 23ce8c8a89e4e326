import type { RehearsalRequest } from '../../shared-types/rehearsal.ts';

/** The form as it is filled in: texts, because a person may still be typing. */
export interface FormTexts {
  channel: string;
  /** names of stored recordings, `CHANNEL/N` */
  recordings: string[];
  regime: string;
  /** '' for the watched channel itself */
  regimeChannel: string;
  leastLead: string;
  horizon: string;
  /** '' for no ceiling of this kind */
  falsePerHour: string;
  cameTrue: string;
  variable: string;
  delay: string;
  tunePart: string;
  seed: string;
  /** lists with commas; '' for chosen around the signal's own time scale */
  windows: string;
  ranks: string;
}

export type FieldName = keyof FormTexts;

/** A form before anybody wrote into it. */
export const EMPTY_FORM: FormTexts = {
  channel: '',
  recordings: [],
  regime: '',
  regimeChannel: '',
  leastLead: '',
  horizon: '',
  falsePerHour: '',
  cameTrue: '',
  variable: 'best',
  delay: '0',
  tunePart: '50',
  seed: '1',
  windows: '',
  ranks: '',
};

/** A form's request, or the sentence that stands beside each field that is wrong. */
export type CheckedForm =
  | { request: RehearsalRequest; faults: null }
  | { request: null; faults: Partial<Record<FieldName, string>> };

/** A number as people write it: a comma or a point, a true minus sign, blanks around it; NaN where it is none. */
export function numberOf(text: string): number {
  const plain = text
    .trim()
    .replace(/−/g, '-')
    .replace(/\s/g, '')
    .replace(/^(-?\d*),(\d+)$/, '$1.$2');
  return plain === '' ? NaN : Number(plain);
}

/** The form as a request, or a sentence for each field that cannot be used. */
export function checkForm(form: FormTexts): CheckedForm {
  const faults: Partial<Record<FieldName, string>> = {};
  const fault = (field: FieldName, sentence: string) => {
    faults[field] ??= sentence;
    return NaN;
  };
  const number = (field: FieldName, good: (value: number) => boolean, expected: string): number => {
    const text = form[field] as string;
    const value = numberOf(text);
    if (text.trim() === '') return fault(field, `Missing: ${expected}.`);
    if (!Number.isFinite(value)) return fault(field, `“${text.trim()}” is no number; expected ${expected}.`);
    return good(value) ? value : fault(field, `${text.trim()} cannot be used; expected ${expected}.`);
  };
  const ceiling = (field: FieldName, good: (value: number) => boolean, expected: string): number | null =>
    (form[field] as string).trim() === ''
      ? null
      : number(field, good, `${expected}, or nothing for no such limit`);
  const list = (field: FieldName, good: (value: number) => boolean, expected: string): number[] | null => {
    const words = (form[field] as string).split(/[;\s]+|,\s*/).filter((word) => word !== '');
    if (words.length === 0) return null;
    const values = words.map(numberOf);
    const wrong = values.findIndex((value) => !Number.isFinite(value) || !good(value));
    if (wrong >= 0) fault(field, `“${words[wrong]}” cannot be used; expected ${expected}.`);
    return values;
  };

  if (form.channel === '') fault('channel', 'Choose the channel to watch.');
  if (form.recordings.length === 0)
    fault('recordings', 'Choose at least one recording to choose settings by and judge them on.');
  if (form.regime.trim() === '')
    fault('regime', 'Say what a switch is: choose a kind above, or write a rule such as sides:-0.8,0.8.');
  const leastLead = number('leastLead', (value) => value >= 0, 'seconds, 0 or more');
  const horizon = number('horizon', (value) => value > 0, 'seconds, more than 0');
  if (leastLead >= horizon)
    fault(
      'horizon',
      `The horizon (${form.horizon.trim()} s) must be longer than the least lead (${form.leastLead.trim()} s), or no warning could ever come true.`,
    );
  const falsePerHour = ceiling('falsePerHour', (value) => value >= 0, 'warnings an hour, 0 or more');
  const cameTrue = ceiling('cameTrue', (value) => value >= 0 && value <= 100, 'a share from 0 to 100');
  const delay = number('delay', (value) => value >= 0, 'seconds, 0 or more');
  const tunePart = number('tunePart', (value) => value >= 10 && value <= 90, 'a share from 10 to 90');
  const seed = number('seed', (value) => Number.isInteger(value) && value >= 0, 'a whole number, 0 or more');
  const windows = list('windows', (value) => value > 0, 'seconds, more than 0, with commas between');
  const ranks = list(
    'ranks',
    (value) => Number.isInteger(value) && value >= 2 && value <= 64,
    'whole numbers from 2 to 64, with commas between',
  );
  if (Object.keys(faults).length > 0) return { request: null, faults };
  return {
    faults: null,
    request: {
      recordings: form.recordings.map((name) => `stored:${name}`),
      channels: [form.channel],
      regime: form.regime.trim(),
      regimeChannel: form.regimeChannel === '' ? null : form.regimeChannel,
      leastLead,
      horizon,
      ceiling: { falsePerHour, cameTrue: cameTrue === null ? null : cameTrue / 100 },
      variable: form.variable === 'forcing' || form.variable === 'level' ? form.variable : 'best',
      delay,
      tunePart: tunePart / 100,
      seed,
      windows,
      ranks,
      threshold: null,
      rearm: null,
      onDelay: null,
      holdOff: null,
    },
  };
}

/** A remembered form; what is missing or of another kind is left as it is in an empty one. */
export function readForm(json: string): FormTexts {
  let kept: unknown;
  try {
    kept = JSON.parse(json);
  } catch {
    return { ...EMPTY_FORM };
  }
  const form: FormTexts = { ...EMPTY_FORM };
  if (typeof kept !== 'object' || kept === null) return form;
  for (const [name, value] of Object.entries(kept)) {
    if (name === 'recordings') {
      if (Array.isArray(value)) form.recordings = value.filter((each) => typeof each === 'string');
    } else if (name in form && typeof value === 'string') Object.assign(form, { [name]: value });
  }
  return form;
}
