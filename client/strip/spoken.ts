import type { AlarmState, WatchState } from '../../shared-types/watch.ts';
import { changes } from '../access/changes.ts';
import { delayLine } from '../delay/words.ts';
import { button, element, mark, say } from '../dom.ts';
import { headline, lastText, leftText, phaseOf, promiseText, unwarnedText } from '../warningWords.ts';
import { clockText, leftOutText } from '../words.ts';
import { type StripView, spokenFor } from './view.ts';

/** What a strip can ask the page to do. */
export interface StripActions {
  acknowledge(watch: string, upTo: number): Promise<void>;
  shelve(watch: string): void;
  measureDelay(watch: string): void;
  reset(watch: string): Promise<void>;
  putBack(watch: string, from: 'shelved' | 'out of service'): Promise<void>;
  explainWatching(channel: string, has: 'nothing' | 'no rule'): void;
}

/** The words right of now: what is expected, what such a warning is worth, and the two actions. */
export interface Spoken {
  root: HTMLElement;
  update(view: StripView): void;
}

/** Creates the words of a strip. */
export function createSpoken(actions: StripActions): Spoken {
  const what = element('p', 'what');
  const when = element('p', 'when');
  const until = element('p', 'until');
  const share = element('p', 'share');
  const where = element('p', 'where');
  const left = element('p', 'left');
  const delay = element('p', 'delayLine');
  const fault = element('p', 'fault');
  fault.setAttribute('role', 'alert');
  let view: StripView | null = null;
  const doing = (run: (view: StripView) => Promise<void> | void) => async () => {
    if (view === null) return;
    say(fault, null);
    try {
      await run(view);
    } catch (error) {
      say(fault, error instanceof Error ? error.message : String(error));
    }
  };
  const acknowledge = button(
    'Acknowledge',
    'first',
    doing((now) => actions.acknowledge(now.watch!.watch, newestId(now))),
  );
  const shelve = button(
    'Shelve…',
    '',
    doing((now) => actions.shelve(now.watch!.watch)),
  );
  const reset = button(
    'Reset',
    'first',
    doing((now) => actions.reset(now.watch!.watch)),
  );
  const back = button(
    '',
    '',
    doing((now) => actions.putBack(now.watch!.watch, now.watch!.state as 'shelved' | 'out of service')),
  );
  const explain = button(
    'How to watch it…',
    '',
    doing((now) => actions.explainWatching(now.channel.channel, now.watch === null ? 'nothing' : 'no rule')),
  );
  const measure = button(
    'Measure my delay',
    '',
    doing((now) => actions.measureDelay(now.watch!.watch)),
  );
  mark(measure, 'aria-keyshortcuts', 'd');
  for (const each of [acknowledge, reset, shelve, back, measure]) changes(each);
  const buttons = element('p', 'buttons', acknowledge, reset, shelve, back, explain, measure);
  say(fault, null);
  return {
    root: element('div', 'spoken', what, when, until, share, where, buttons, left, delay, fault),
    update: (next) => {
      view = next;
      const { watch } = next;
      const words = wordsOf(next);
      say(what, words.what);
      say(when, words.when);
      say(until, words.until);
      say(share, words.share);
      say(where, words.where);
      say(left, words.left);
      const asks = watch !== null && !watch.trigger && waitsForPerson(watch.state);
      acknowledge.hidden = !asks;
      reset.hidden = watch?.state !== 'latched, acknowledged';
      shelve.hidden =
        !(asks || words.open) || watch?.state === 'shelved' || watch?.state === 'out of service';
      back.hidden = !(watch?.state === 'shelved' || watch?.state === 'out of service');
      say(back, back.hidden ? null : watch?.state === 'shelved' ? 'Unshelve' : 'Return to service');
      explain.hidden = !(watch === null || watch.rule === null);
      // while a warning waits for a person there is something better to do; its key still works
      measure.hidden =
        watch === null || watch.rule === null || (asks && words.open) || next.page.zoom !== null;
      const known = watch === null ? undefined : next.page.state.delays.get(watch.watch);
      say(delay, known === undefined || words.open ? null : delayLine(known));
      mark(delay, 'data-eaten', known?.left != null && known.left <= 0 ? '' : null);
      buttons.hidden = [acknowledge, reset, shelve, back, explain, measure].every((each) => each.hidden);
      for (const each of [acknowledge, reset, shelve, back, measure]) each.disabled = next.page.lost;
    },
  };
}

/** Whether somebody has yet to acknowledge. */
const waitsForPerson = (state: AlarmState): boolean =>
  state === 'unacknowledged' ||
  state === 'returned to normal, unacknowledged' ||
  state === 'latched, unacknowledged';

function newestId(view: StripView): number {
  return view.warnings[view.warnings.length - 1]?.id ?? 0;
}

interface Words {
  open: boolean;
  what: string;
  when: string | null;
  until: string | null;
  share: string | null;
  where: string | null;
  left: string | null;
}

const NOTHING: Words = {
  open: false,
  what: '',
  when: null,
  until: null,
  share: null,
  where: null,
  left: null,
};

function wordsOf(view: StripView): Words {
  const { watch, now } = view;
  if (watch === null)
    return { ...NOTHING, what: 'Drawn only', share: 'No model watches this channel, so it never warns.' };
  if (watch.rule === null)
    return {
      ...NOTHING,
      what: 'Never warns',
      share: 'Its model has no watch rule: the forcing is drawn, nothing more.',
    };
  if (watch.state === 'out of service')
    return { ...NOTHING, what: 'Out of service', share: reasonText(watch) };
  if (watch.state === 'shelved') {
    const end = watch.shelvedUntil === null ? '' : ` until ${clockText(watch.shelvedUntil)}`;
    return { ...NOTHING, what: `Shelved${end}`, share: reasonText(watch), where: shelvedOpen(view) };
  }
  const warning = spokenFor(view);
  if (warning === null || now === null) return quietWords(view);
  const line = headline(warning, watch, now);
  const promise = promiseText(watch);
  const begun = phaseOf(warning, now) !== 'ahead';
  return {
    open: phaseOf(warning, now) !== 'over',
    what: line.what,
    when: line.when,
    until: begun ? line.until : null,
    share: promise?.share ?? 'no rehearsal says how many such warnings come true',
    where: promise?.where ?? null,
    left: watch.trigger
      ? 'a trigger: nobody is asked to acknowledge'
      : (acknowledgedBy(view, warning.acknowledgedAt) ?? leftText(warning, watch, now)),
  };
}

const reasonText = ({ reason, setAsideBy }: WatchState): string | null =>
  setAsideBy === null ? reason : `${reason ?? ''} (by ${setAsideBy})`.trim();

function shelvedOpen(view: StripView): string | null {
  return spokenFor(view) === null ? null : 'a warning is open meanwhile';
}

function acknowledgedBy(view: StripView, at: number | null): string | null {
  if (at === null) return null;
  const by = view.warnings.findLast((warning) => warning.acknowledgedAt !== null)?.acknowledgedBy;
  return `acknowledged at ${clockText(at)}${by ? ` by ${by}` : ''}`;
}

function quietWords(view: StripView): Words {
  const watch = view.watch!;
  const what = watch.state.startsWith('latched')
    ? 'Latched: over, not reset'
    : view.channel.silent
      ? 'No data, no warning'
      : leftOutText(watch) !== null
        ? 'Left out: cannot warn now'
        : watch.sight.kind === 'blind'
          ? 'Blind: cannot warn yet'
          : 'No warning open';
  return {
    ...NOTHING,
    what,
    share: view.channel.silent
      ? 'While the channel is silent nothing can be seen ahead.'
      : unwarnedText(watch),
    where: lastText(view.warnings[view.warnings.length - 1], watch, view.page.today),
  };
}

/** The headline state of a strip, for its style: a warning that waits for a person, one seen to, or none. */
export function stance(view: StripView): 'asks' | 'seen' | 'quiet' {
  const { watch, now } = view;
  if (watch === null || now === null || watch.state === 'shelved' || watch.state === 'out of service')
    return 'quiet';
  const warning = spokenFor(view);
  if (warning === null || phaseOf(warning, now) === 'over') return 'quiet';
  return warning.acknowledgedAt !== null ? 'seen' : 'asks';
}

/** Sets a strip's stance on an element. */
export function markStance(root: HTMLElement, view: StripView): void {
  mark(root, 'data-stance', stance(view));
}
