import type { Contender, RehearsalResult } from '../../shared-types/rehearsal.ts';
import { element, mark } from '../dom.ts';
import { capital, numberText } from '../words.ts';
import { ownContender } from './tradeOff.ts';

/** What else was tried beside the chosen variable, best first; `look` is told whose line to emphasise. */
export function createContendersTable(
  result: RehearsalResult,
  look: (contender: number | null) => void,
): HTMLElement {
  const own = ownContender(result);
  const order = [...result.contenders.keys()].sort((a, b) => {
    const [first, second] = [result.contenders[a]!, result.contenders[b]!];
    if (first === own || second === own) return first === own ? -1 : 1;
    return (second.skill ?? -Infinity) - (first.skill ?? -Infinity);
  });
  const heads = ['', 'Set to', 'Skill', 'Warned', 'Came true'].map((text) => {
    const head = element('th', '', text);
    head.scope = 'col';
    return head;
  });
  const rows = order.map((index) => {
    const contender = result.contenders[index]!;
    const row = rowOf(contender, contender === own);
    row.tabIndex = 0;
    row.addEventListener('pointerenter', () => look(index));
    row.addEventListener('focus', () => look(index));
    row.addEventListener('pointerleave', () => look(null));
    row.addEventListener('blur', () => look(null));
    return row;
  });
  return element(
    'div',
    'tableScroll',
    element(
      'table',
      'contenders',
      element('caption', 'unseen', 'Variables and baselines on the judged part'),
      element('thead', '', element('tr', '', ...heads)),
      element('tbody', '', ...rows),
    ),
  );
}

function rowOf({ name, kind, settings, skill, detection, cameTrue }: Contender, own: boolean) {
  const share = (value: number | null) => (value === null ? '–' : `${Math.round(100 * value)} %`);
  const head = element(
    'th',
    '',
    element('span', `lineSign ${own ? 'chosen' : kind}`),
    capital(name),
    ...(own ? [element('span', 'tag', ' chosen')] : []),
  );
  head.scope = 'row';
  const row = element(
    'tr',
    '',
    head,
    element('td', '', settings),
    element('td', 'figure', skill === null ? '–' : numberText(skill, 2)),
    element('td', 'figure', share(detection)),
    element('td', 'figure', share(cameTrue)),
  );
  mark(row, 'data-kind', own ? 'chosen' : kind);
  return row;
}
