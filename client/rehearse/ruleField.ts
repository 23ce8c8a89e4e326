import { button, element, mark, say } from '../dom.ts';
import { choiceControl, createField, offer, textControl } from './fields.ts';
import { RULE_KINDS, type RuleParts, ruleParts, ruleText } from './ruleForm.ts';

/** What a switch is: a kind with its numbers, or the same as text, whichever a person likes to write. */
export interface RuleField {
  root: HTMLElement;
  text(): string;
  set(text: string): void;
  /** the channel the rule reads; '' for the watched one */
  channel(): string;
  setChannel(channel: string): void;
  /** channels the rule may read instead, and the unit of the one it reads */
  offer(others: readonly string[], unit: string): void;
  fault(sentence: string | null): void;
  /** what the rule finds, in words; null: not known */
  found(sentence: string | null): void;
  /** a rule to begin with; null: none can be defended; undefined: not known yet */
  propose(proposal: { rule: string; why: string } | null | undefined): void;
}

const EITHER = [
  { value: '', words: 'either way' },
  { value: 'up', words: 'upwards only' },
  { value: 'down', words: 'downwards only' },
];

/** Creates the fields; `changed` runs whenever the rule or its channel does, `took` when the proposed rule was taken. */
export function createRuleField(changed: () => void): RuleField {
  let others: readonly string[] = [];
  let unit = '';
  const kind = choiceControl([
    { value: '', words: 'choose …' },
    ...RULE_KINDS.map((each) => ({ value: each.kind, words: each.words })),
  ]);
  const kindField = createField(kind, {
    name: 'It is a switch when',
    help: 'The kind of change to be warned of.',
  });
  const numbers = element('div', 'ruleNumbers');
  const text = textControl('rule');
  const textField = createField(text, {
    name: 'The same as text',
    help: 'As the commands take it, for example sides:-0.8,0.8 or dip:12,14,5.',
  });
  const channel = choiceControl([{ value: '', words: 'the watched channel' }]);
  const channelField = createField(channel, {
    name: 'read on',
    help: 'The rule may read another channel than the one that warns.',
  });
  const found = element('p', 'ruleFound');
  mark(found, 'role', 'status');
  const proposed = element('div', 'proposed');

  const marksOf = () => (channel.value === '' ? others : [channel.value]);
  const showParts = (parts: RuleParts | null) => {
    kind.value = parts?.kind ?? '';
    numbers.replaceChildren(...(parts === null ? [] : numberFields(parts, unit, marksOf(), edited)));
  };
  const edited = (parts: RuleParts) => {
    text.value = ruleText(parts);
    changed();
  };
  kind.addEventListener('change', () => {
    const chosen = RULE_KINDS.find((each) => each.kind === kind.value);
    if (chosen === undefined) return;
    const parts = { kind: chosen.kind, numbers: chosen.numbers.map(() => ''), channel: '', to: '' as const };
    text.value = ruleText(parts);
    showParts(parts);
    numbers.querySelector<HTMLElement>('input, select')?.focus();
    changed();
  });
  text.addEventListener('input', () => {
    showParts(ruleParts(text.value));
    changed();
  });
  channel.addEventListener('change', changed);
  const set = (rule: string) => {
    text.value = rule;
    showParts(ruleParts(rule));
  };
  say(found, null);
  return {
    root: element(
      'div',
      'ruleField',
      proposed,
      element('div', 'ruleKind', kindField.root, channelField.root),
      numbers,
      textField.root,
      found,
    ),
    text: () => text.value,
    set,
    channel: () => channel.value,
    setChannel: (name) => {
      channel.value = name;
      if (channel.selectedIndex < 0) channel.value = '';
    },
    offer: (names, newUnit) => {
      others = names;
      offer(channel, [
        { value: '', words: 'the watched channel' },
        ...names.map((name) => ({ value: name, words: name })),
      ]);
      channelField.root.hidden = names.length === 0;
      if (unit === newUnit) return;
      unit = newUnit;
      for (const each of numbers.querySelectorAll<HTMLElement>('[data-value] .unit')) say(each, unit);
    },
    fault: (sentence) => {
      textField.fault(sentence);
    },
    found: (sentence) => {
      say(found, sentence);
    },
    propose: (proposal) => {
      if (proposal === undefined) return proposed.replaceChildren();
      if (proposal === null) {
        const words =
          'No rule can be proposed from these values: look at the signal, then choose a kind and its levels.';
        return proposed.replaceChildren(element('p', 'fieldHelp', words));
      }
      const take = button(`Start from ${proposal.rule}`, '', () => {
        set(proposal.rule);
        changed();
        text.focus();
      });
      proposed.replaceChildren(take, element('span', 'fieldHelp', proposal.why));
    },
  };
}

function numberFields(
  parts: RuleParts,
  unit: string,
  channels: readonly string[],
  edited: (parts: RuleParts) => void,
): HTMLElement[] {
  const known = RULE_KINDS.find(({ kind }) => kind === parts.kind)!;
  let now = parts;
  const change = (changes: Partial<RuleParts>) => {
    now = { ...now, ...changes };
    edited(now);
  };
  const made = known.numbers.map(({ name, unit: of, help }, i) => {
    const control = textControl('number');
    control.value = now.numbers[i] ?? '';
    control.addEventListener('input', () =>
      change({ numbers: known.numbers.map((_, k) => (k === i ? control.value : (now.numbers[k] ?? ''))) }),
    );
    const { root } = createField(control, { name, help, unit: of === 's' ? 's' : unit || ' ' });
    if (of === 'value') mark(root, 'data-value', 'yes');
    return root;
  });
  if (known.kind === 'marks') {
    const control = choiceControl([
      { value: '', words: 'choose …' },
      ...channels.map((name) => ({ value: name, words: name })),
    ]);
    control.value = now.channel;
    control.addEventListener('change', () => change({ channel: control.value }));
    const help = 'A switch is where this channel goes from 0 to another value.';
    made.push(createField(control, { name: 'marked on', help }).root);
  }
  if (known.directions) {
    const control = choiceControl(EITHER);
    control.value = now.to;
    control.addEventListener('change', () => change({ to: control.value as RuleParts['to'] }));
    made.push(createField(control, { name: 'which counts', help: 'Both ways, or one of them only.' }).root);
  }
  return made;
}
