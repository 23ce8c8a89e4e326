import type { ChannelState } from '../../shared-types/channel.ts';
import type { RehearsalRequest } from '../../shared-types/rehearsal.ts';
import { changes } from '../access/changes.ts';
import { element, mark, say } from '../dom.ts';
import { recall, remember } from '../remembered.ts';
import { choiceControl, createField, type Field, offer, textControl } from './fields.ts';
import { checkForm, type FieldName, type FormTexts, readForm } from './formCheck.ts';
import { createLeftOutFields } from './leftOutFields.ts';
import { offerMeasuredDelay } from './measuredDelay.ts';
import { createPreview } from './preview.ts';
import { createRecordingList } from './recordingList.ts';
import { createRuleField } from './ruleField.ts';
import { createSignalView } from './signalView.ts';
import { groups, type RecordingName } from './text.ts';

/** The form of a rehearsal, with the signal it is about. */
export interface RehearseForm {
  root: HTMLElement;
  /** what there is to choose from; keeps what was chosen */
  offer(channels: readonly ChannelState[], recordings: readonly RecordingName[]): void;
  refreshLeftOut(): Promise<void>;
  /** fills in what another rehearsal was asked */
  fill(request: RehearsalRequest): void;
  /** a sentence at the foot of the form; null: none */
  fault(sentence: string | null): void;
  busy(running: boolean): void;
}

type TextField = Exclude<FieldName, 'recordings'>;

/** Creates the form; `run` is called with a request that is complete. */
export function createForm(run: (request: RehearsalRequest) => void): RehearseForm {
  let texts = readForm(recall('rehearse', ''));
  let channels: readonly ChannelState[] = [];
  let stored: readonly RecordingName[] = [];
  let tried = false;
  const channel = choiceControl([]);
  const fields = numberFields();
  const measured = offerMeasuredDelay(fields.delay);
  const channelField = createField(channel, { name: 'Channel', help: 'What is to be watched.' });
  const recordingList = createRecordingList((names) => change({ recordings: names }));
  const rule = createRuleField(() => change({ regime: rule.text(), regimeChannel: rule.channel() }));
  const leftOut = createLeftOutFields(() => {
    signal.leaveOut(leftOut.marks());
    preview.ask(true);
  });
  const signal = createSignalView((from, to) => leftOut.stretch(from, to));
  const preview = createPreview({
    rule,
    drawing: signal,
    asked: () => ({
      recordings: chosen(),
      channel: texts.channel,
      regime: texts.regime,
      regimeChannel: texts.regimeChannel,
    }),
  });
  const faultLine = element('p', 'fieldFault');
  mark(faultLine, 'role', 'alert');
  say(faultLine, null);
  const go = changes(element('button', 'first', 'Rehearse'));
  go.type = 'submit';

  const chosen = (): RecordingName[] =>
    stored
      .filter(({ name, channel: of }) => of === texts.channel && texts.recordings.includes(name))
      .sort((a, b) => a.from - b.from);
  const unitOf = (name: string) => channels.find((each) => each.channel === name)?.unit ?? '';
  const judge = () => {
    const { faults } = checkForm(texts);
    const tell = (name: FieldName) => (tried ? (faults?.[name] ?? null) : null);
    channelField.fault(tell('channel'));
    recordingList.fault(tell('recordings'));
    // a rule that is there but wrong has the server's own sentence, from the preview
    if (texts.regime.trim() === '') rule.fault(tell('regime'));
    for (const [name, field] of Object.entries(fields)) {
      const text = texts[name as TextField];
      const sentence = faults?.[name as FieldName] ?? null;
      field.fault(tried || (text !== '' && field.control !== document.activeElement) ? sentence : null);
    }
    say(faultLine, null);
  };
  const change = (changes: Partial<FormTexts>) => {
    texts = { ...texts, ...changes };
    remember('rehearse', JSON.stringify(texts));
    judge();
    show();
  };
  const show = () => {
    const range = chosen();
    const state = channels.find((each) => each.channel === texts.channel);
    const others = channels.map((each) => each.channel).filter((name) => name !== texts.channel);
    measured.of(texts.channel);
    rule.offer(others, unitOf(texts.regimeChannel || texts.channel));
    leftOut.of(
      texts.channel,
      Math.min(...range.map(({ from }) => from), Infinity),
      Math.max(...range.map(({ to }) => to), -Infinity),
      others.map((name) => ({ name, unit: unitOf(name) })),
    );
    side(state, range);
    drawing.hidden = range.length === 0;
    if (range.length === 0) return;
    signal.show({
      recordings: range,
      channel: texts.channel,
      regimeChannel: texts.regimeChannel,
      unitOf,
      interval: state?.interval ?? null,
    });
    signal.leaveOut(leftOut.marks());
    preview.ask();
  };

  const name = element('h3', 'name');
  const facts = element('p', 'label');
  const side = (state: ChannelState | undefined, range: RecordingName[]) => {
    say(name, texts.channel);
    const samples = range.reduce((sum, each) => sum + each.samples, 0);
    const parts = [state?.label ?? '', range.length === 0 ? '' : `${groups(samples)} samples`];
    if (state?.interval != null) parts.push(`every ${Number(state.interval.toPrecision(3))} s`);
    say(facts, parts.filter((part) => part !== '').join(', '));
  };
  const drawing = element('div', 'formSignal', element('div', 'side', name, facts), signal.root);

  channel.addEventListener('change', () => choose(channel.value));
  for (const [key, field] of Object.entries(fields)) {
    const read = () => change({ [key]: field.control.value });
    field.control.addEventListener('input', read);
    field.control.addEventListener('change', read);
    field.control.addEventListener('blur', () => setTimeout(judge));
  }
  const choose = (next: string) => {
    const own = stored.filter((each) => each.channel === next);
    const longest = own.reduce<RecordingName | null>(
      (best, each) => (best === null || each.samples > best.samples ? each : best),
      null,
    );
    recordingList.offer(own, longest === null ? [] : [longest.name]);
    texts = { ...texts, regimeChannel: '' };
    rule.setChannel('');
    change({ channel: next, recordings: longest === null ? [] : [longest.name] });
  };
  const fillIn = () => {
    rule.set(texts.regime);
    for (const [key, field] of Object.entries(fields)) field.control.value = texts[key as TextField];
  };
  fillIn();

  const form = element('form', 'rehearseForm');
  form.noValidate = true;
  form.append(
    element('div', 'picks', channelField.root, recordingList.root),
    drawing,
    element(
      'div',
      'questions',
      group('What is a switch?', rule.root),
      group('What would serve you?', ...served(fields)),
    ),
  );
  // the stretches' own small forms must not lie within this one
  const root = element(
    'section',
    'asks',
    form,
    group('What must not count?', leftOut.root),
    element('div', 'go', faultLine, go),
  );
  form.id = 'rehearseForm';
  go.setAttribute('form', form.id);
  form.addEventListener('submit', (event) => {
    event.preventDefault();
    tried = true;
    judge();
    const { request } = checkForm(texts);
    if (request !== null) return run(request);
    say(faultLine, 'Something above is missing or wrong; it says what beside the field.');
    root.querySelector<HTMLElement>('[aria-invalid]')?.focus();
  });

  return {
    root,
    offer: (known, recordings) => {
      channels = known;
      stored = recordings;
      const names = known
        .map((each) => each.channel)
        .filter((each) => stored.some((one) => one.channel === each));
      offer(
        channel,
        names.map((each) => ({ value: each, words: each })),
      );
      if (names.length === 0) return;
      if (!names.includes(texts.channel)) {
        const most = stored.reduce((best, each) => (each.samples > best.samples ? each : best));
        channel.value = most.channel;
        choose(most.channel);
        return;
      }
      channel.value = texts.channel;
      const own = stored.filter((each) => each.channel === texts.channel);
      const kept = texts.recordings.filter((each) => own.some(({ name: one }) => one === each));
      if (kept.length === 0) return choose(texts.channel);
      recordingList.offer(own, kept);
      texts = { ...texts, recordings: kept };
      show();
      rule.setChannel(texts.regimeChannel);
      show();
    },
    refreshLeftOut: async () => {
      await leftOut.refresh();
      signal.leaveOut(leftOut.marks());
    },
    fill: (request) => {
      texts = { ...texts, ...textsOf(request) };
      remember('rehearse', JSON.stringify(texts));
      fillIn();
    },
    fault: (sentence) => {
      say(faultLine, sentence);
    },
    busy: (running) => {
      go.disabled = running;
      say(go, running ? 'Rehearsing …' : 'Rehearse');
    },
  };
}

function group(title: string, ...children: Node[]): HTMLElement {
  const made = element('fieldset', 'group', element('legend', '', title), ...children);
  return made;
}

type NumberFields = Record<
  Exclude<TextField, 'channel' | 'regime' | 'regimeChannel'>,
  Field<HTMLInputElement | HTMLSelectElement>
>;

function numberFields(): NumberFields {
  const number = (name: string, help: string, unit: string) =>
    createField(textControl('number'), { name, help, unit });
  return {
    leastLead: number('Least useful lead', 'With shorter notice than this it is too late to act.', 's'),
    horizon: number('Horizon', 'How far ahead a warning speaks: the switch must come within this.', 's'),
    falsePerHour: number(
      'False warnings, at most',
      'What you would put up with. Empty: no such limit.',
      'an hour',
    ),
    cameTrue: number(
      'Coming true, at least',
      'Share of the warnings that a switch follows. Empty: no such limit.',
      'of 100',
    ),
    variable: createField(
      choiceControl([
        { value: 'best', words: 'whichever does best' },
        { value: 'forcing', words: 'the forcing' },
        { value: 'level', words: 'a plain level' },
      ]),
      { name: 'Watch', help: 'The forcing is made of a whole window; a level of the newest sample.' },
    ),
    delay: number(
      'Delivery takes',
      'Until a person or an output has the warning; taken off every lead.',
      's',
    ),
    tunePart: number('Tuning part', 'Settings are chosen on this part, judged on the rest.', 'of 100'),
    seed: number(
      'Seed',
      'Of the chance behind intervals and p-values: the same seed, the same figures.',
      ' ',
    ),
    windows: number('Windows to try', 'With commas between. Empty: around the signal’s own time scale.', 's'),
    ranks: number('Ranks to try', 'With commas between. Empty: several.', ' '),
  };
}

function served(fields: NumberFields): Node[] {
  const more = element(
    'details',
    'more',
    element('summary', '', 'More settings'),
    element(
      'div',
      'fieldGrid',
      ...(['delay', 'tunePart', 'windows', 'ranks', 'seed'] as const).map((name) => fields[name].root),
    ),
  );
  const first = (['leastLead', 'horizon', 'falsePerHour', 'cameTrue', 'variable'] as const).map(
    (name) => fields[name].root,
  );
  return [element('div', 'fieldGrid', ...first), more];
}

/** The form's texts of a request, as far as it holds them. */
export function textsOf(request: RehearsalRequest): Partial<FormTexts> {
  const percent = (share: number) => String(Number((100 * share).toPrecision(6)));
  const { ceiling } = request;
  return {
    channel: request.channels[0]!,
    recordings: request.recordings.map((name) => name.replace(/^stored:/, '')),
    regime: request.regime,
    regimeChannel: request.regimeChannel ?? '',
    leastLead: String(request.leastLead),
    horizon: String(request.horizon),
    falsePerHour: ceiling.falsePerHour === null ? '' : String(ceiling.falsePerHour),
    cameTrue: ceiling.cameTrue === null ? '' : percent(ceiling.cameTrue),
    variable: request.variable,
    delay: String(request.delay),
    tunePart: percent(request.tunePart),
    seed: String(request.seed),
    windows: request.windows?.join(', ') ?? '',
    ranks: request.ranks?.join(', ') ?? '',
  };
}
