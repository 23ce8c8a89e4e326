import type { MeasuredDelay } from '../../shared-types/delivery.ts';
import { changes } from '../access/changes.ts';
import { button, element, mark, say } from '../dom.ts';
import { send } from '../requests.ts';
import { modal, whoIsHere } from '../watch/dialogs.ts';
import { drawDelay } from './drawing.ts';
import { chargedDelay, delayRows, delaySentence } from './words.ts';

/** Asks for a trial. @throws Error with the server's own sentence */
async function trial(watch: string): Promise<MeasuredDelay> {
  const address = `/api/watches/${encodeURIComponent(watch)}/trials`;
  return (await send(address, { by: whoIsHere() })) as MeasuredDelay;
}

const ROW_CLASS = { part: 'delayPart', within: 'delayWithin', sum: 'delaySum' } as const;

function table(delay: MeasuredDelay): HTMLElement {
  const rows = delayRows(delay).map(({ name, seconds, text, level }) => {
    const head = element('th', '', name);
    head.scope = 'row';
    return element(
      'tr',
      ROW_CLASS[level],
      head,
      element('td', 'delaySeconds', seconds),
      element('td', '', text),
    );
  });
  return element('table', 'delayTable', element('tbody', '', ...rows));
}

function findings(delay: MeasuredDelay): Node[] {
  const silent = element(
    'p',
    'note',
    'The producer did not answer the trial: it does not know of trials, or its frames come too rarely. What its frames tell is used instead.',
  );
  const charge = element(
    'p',
    'note',
    'A rehearsal charges this delay to every lead with ',
    element('code', '', `--delay ${chargedDelay(delay.total)}`),
    '.',
  );
  return [
    element('p', 'delaySentence', delaySentence(delay)),
    ...(delay.answered ? [] : [silent]),
    drawDelay(delay),
    table(delay),
    charge,
  ];
}

/** Measures how late a watch's warnings come to the person here, and shows it. */
export function measureDelay(watch: string, name: string): void {
  const answer = element('div', 'delayAnswer');
  mark(answer, 'aria-live', 'polite');
  const fault = element('p', 'fault');
  mark(fault, 'role', 'alert');
  say(fault, null);
  const again = changes(button('Measure again', '', () => run()));
  const close = button('Close', 'first', () => dialog.close());
  const dialog = modal(
    `How late a warning of ${name} reaches you`,
    element(
      'p',
      'note',
      'A trial goes the way of a warning, from the producer to this page, its tone and the webhooks. It is marked as a trial everywhere and counts nowhere.',
    ),
    answer,
    fault,
    element('p', 'buttons', again, close),
  );
  dialog.classList.add('delayDialog');
  const run = async () => {
    again.disabled = true;
    say(fault, null);
    answer.replaceChildren(element('p', 'delaySentence', 'The trial is on its way…'));
    try {
      answer.replaceChildren(...findings(await trial(watch)));
    } catch (error) {
      answer.replaceChildren();
      say(fault, error instanceof Error ? error.message : String(error));
    }
    again.disabled = false;
  };
  void run();
}
