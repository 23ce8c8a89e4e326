/** A kind of rule as the helper offers it: its words, its numbers, and which way it may be limited to. */
export interface RuleKind {
  kind: string;
  words: string;
  /** what each number is; unit 'value': the channel's own, 's': seconds */
  numbers: { name: string; unit: 'value' | 's'; help: string }[];
  /** it knows both directions, and may be limited to one */
  directions: boolean;
}

/** The kinds of rule, in the order they are offered. `levels` takes any number of parting levels, as a list. */
export const RULE_KINDS: readonly RuleKind[] = [
  {
    kind: 'sides',
    words: 'it changes sides',
    numbers: [
      { name: 'low side below', unit: 'value', help: 'below this it is on the low side' },
      { name: 'high side above', unit: 'value', help: 'above this it is on the high side' },
    ],
    directions: true,
  },
  {
    kind: 'excursion',
    words: 'it shoots up',
    numbers: [
      { name: 'rises through', unit: 'value', help: 'the rise through this level is the switch' },
      { name: 'over once below', unit: 'value', help: 'below this the excursion is over' },
      { name: 'one within', unit: 's', help: 'rises closer together than this are one' },
    ],
    directions: false,
  },
  {
    kind: 'dip',
    words: 'it falls away',
    numbers: [
      { name: 'falls through', unit: 'value', help: 'the fall through this level is the switch' },
      { name: 'over once above', unit: 'value', help: 'above this the dip is over' },
      { name: 'one within', unit: 's', help: 'falls closer together than this are one' },
    ],
    directions: false,
  },
  {
    kind: 'burst',
    words: 'it begins to swing',
    numbers: [
      { name: 'swing over', unit: 's', help: 'the running RMS is taken over this time' },
      { name: 'begins above', unit: 'value', help: 'a running RMS above this is a burst' },
      { name: 'ends below', unit: 'value', help: 'below this the burst is over' },
    ],
    directions: false,
  },
  {
    kind: 'levels',
    words: 'it moves to another band',
    numbers: [
      { name: 'bands parted by', unit: 'value', help: 'one level or several, ascending, with commas' },
      { name: 'dead band', unit: 'value', help: 'a level counts as passed half of this beyond it' },
    ],
    directions: true,
  },
  {
    kind: 'marks',
    words: 'another channel marks it',
    numbers: [],
    directions: false,
  },
];

/** A rule taken apart for the helper; texts, because a person may still be typing. */
export interface RuleParts {
  kind: string;
  numbers: string[];
  /** the channel of `marks` */
  channel: string;
  to: '' | 'up' | 'down';
}

/** The text form of a rule's parts, as far as they go. */
export function ruleText({ kind, numbers, channel, to }: RuleParts): string {
  const known = RULE_KINDS.find((each) => each.kind === kind);
  const tail = to === '' || known?.directions === false ? '' : `,to=${to}`;
  if (kind === 'marks') return `marks:${channel}`;
  const plain = numbers.map((each) => each.trim().replace(/\s+/g, '').replace(/−/g, '-'));
  if (kind !== 'levels') return `${kind}:${plain.join(',')}${tail}`;
  const deadband = plain[1] === undefined || plain[1] === '' ? '' : `,deadband=${plain[1]}`;
  return `levels:${plain[0] ?? ''}${deadband}${tail}`;
}

/** A rule's text taken apart; null where the helper has no fields for it (the text is then edited as it is). */
export function ruleParts(text: string): RuleParts | null {
  const colon = text.indexOf(':');
  const known = RULE_KINDS.find(({ kind }) => kind === text.slice(0, Math.max(0, colon)).trim());
  if (known === undefined) return null;
  const tail = text.slice(colon + 1);
  if (known.kind === 'marks') return { kind: 'marks', numbers: [], channel: tail.trim(), to: '' };
  const words = tail
    .split(/[,\s]+/)
    .map((word) => word.trim())
    .filter((word) => word !== '');
  const named = (name: string) => words.find((word) => word.startsWith(`${name}=`))?.slice(name.length + 1);
  const plain = words.filter((word) => !word.includes('='));
  const to = named('to') ?? '';
  if (to !== '' && to !== 'up' && to !== 'down') return null;
  if (known.kind === 'levels')
    return { kind: 'levels', numbers: [plain.join(','), named('deadband') ?? ''], channel: '', to };
  if (plain.length > known.numbers.length) return null;
  return {
    kind: known.kind,
    numbers: known.numbers.map((_, i) => plain[i] ?? ''),
    channel: '',
    to: known.directions ? to : '',
  };
}

/** What a switch of a rule is called: "reversal", "excursion", "dip", "burst", otherwise "switch". */
export function switchWord(text: string): string {
  const kind = text.slice(0, Math.max(0, text.indexOf(':'))).trim();
  if (kind === 'sides') return 'reversal';
  return kind === 'excursion' || kind === 'dip' || kind === 'burst' ? kind : 'switch';
}
