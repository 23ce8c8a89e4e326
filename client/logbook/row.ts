import type { LogbookEntry, LogbookKind } from '../../shared-types/logbook.ts';
import { button, element, mark } from '../dom.ts';
import { actedButton } from '../watch/dialogs.ts';
import { stripAddress } from '../watch/place.ts';
import { clockText } from '../words.ts';

/** Spans around a moment that a link to the strip shows, in horizons of the warning, or seconds where none is known. */
const AROUND_HORIZONS = 6;
const AROUND_SECONDS = 120;

/** A mark that stands for a kind beside its word, so that a glance finds it. */
const MARKS: Partial<Record<LogbookKind, string>> = {
  warning: '▲',
  switch: '▼',
  acknowledged: '✓',
  acted: '✓',
  latch: '‖',
  shelved: '‖',
  unshelved: '‖',
  'out of service': '×',
  'in service': '×',
  note: '✎',
  gap: '┄',
  hole: '┄',
  refused: '┄',
  likeness: '◇',
  mark: '▒',
  model: '≡',
  watch: '≡',
  rehearsal: '≡',
  play: '▷',
};

/** What a line may be asked for. */
export interface RowActions {
  /** opens or closes the card of a switch below its line */
  toggleCard(entry: LogbookEntry, row: HTMLElement): void;
  /** seconds of the horizon of a watch; null: not known */
  horizonOf(watch: string | null): number | null;
}

const cell = (className: string, ...children: (Node | string)[]) => {
  const made = element('div', className, ...children);
  mark(made, 'role', 'cell');
  return made;
};

/** A line of the logbook as a row of the table. */
export function createRow(entry: LogbookEntry, actions: RowActions): HTMLElement {
  const isElapsed = entry.at !== null && entry.at < 1e8;
  const time = element('time', '', clockText(entry.time, entry.at === null ? 0 : 1));
  time.dateTime = new Date(entry.time * 1000).toISOString();
  const sign = element('span', 'sign', MARKS[entry.kind] ?? '·');
  mark(sign, 'aria-hidden', 'true');
  const kind = cell('logKind', sign, ` ${entry.kind}`);
  const where = entry.channel ?? entry.name ?? '';
  const became = entry.by === '' ? entry.became : [entry.became, `by ${entry.by}`].filter(Boolean).join(' ');
  const row = element(
    'div',
    'logRow',
    cell('logTime', time, ...(isElapsed ? [element('small', '', ` at ${clockText(entry.at!, 1)}`)] : [])),
    kind,
    cell('logWhere', where),
    cell('logText', entry.text),
    cell('logBecame', ...(entry.waits ? ['▲ waits: '] : []), became),
    cell('logDo', ...doings(entry, actions)),
  );
  mark(row, 'role', 'row');
  mark(row, 'data-kind', entry.kind);
  mark(row, 'data-key', entry.key);
  mark(row, 'data-waits', entry.waits ? 'yes' : null);
  row.tabIndex = -1;
  return row;
}

function doings(entry: LogbookEntry, actions: RowActions): Node[] {
  const made: Node[] = [];
  if (entry.at !== null && entry.channel !== null) {
    const horizon = actions.horizonOf(entry.watch);
    const seconds = horizon === null ? AROUND_SECONDS : AROUND_HORIZONS * horizon;
    const link = element('a', '', 'strip');
    link.href = stripAddress({ channel: entry.channel, at: entry.at, seconds });
    mark(link, 'aria-label', `Strip of ${entry.channel} at ${clockText(entry.at, 1)}`);
    made.push(link);
  }
  if (entry.warning !== null) made.push(actedButton(entry.warning, entry.channel ?? entry.name ?? 'a watch'));
  if (entry.switch !== null) {
    const open = button('card', 'quiet', () =>
      actions.toggleCard(entry, open.closest<HTMLElement>('.logRow')!),
    );
    mark(open, 'aria-expanded', 'false');
    mark(open, 'aria-label', `Card of the switch of ${entry.channel} at ${clockText(entry.switch.at, 1)}`);
    made.push(open);
  }
  return made;
}

/** A row that says which day the rows below it are of. */
export function createDayRow(day: string): HTMLElement {
  const only = cell('', day);
  mark(only, 'aria-colspan', '6');
  const row = element('div', 'logDay', only);
  mark(row, 'role', 'row');
  return row;
}

const DAYS = 'Sunday Monday Tuesday Wednesday Thursday Friday Saturday'.split(' ');
const MONTHS = 'January February March April May June July August September October November December'.split(
  ' ',
);

/** "Tuesday 1 December 2026" of a time (s, UTC). */
export function dayText(time: number): string {
  if (time < 1e8) return 'Elapsed time';
  const date = new Date(time * 1000);
  return `${DAYS[date.getUTCDay()]} ${date.getUTCDate()} ${MONTHS[date.getUTCMonth()]} ${date.getUTCFullYear()}`;
}
