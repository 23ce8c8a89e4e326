import type { OperatingRow, RehearsalResult } from '../../shared-types/rehearsal.ts';
import { element, mark, say } from '../dom.ts';
import { figuresOf, rowSentence } from './text.ts';

/** The figures of the judged part at the threshold in hand. */
export interface Figures {
  root: HTMLElement;
  follow(index: number, row: OperatingRow): void;
}

/** Creates the figures. */
export function createFigures(result: RehearsalResult, setting: { word: string; unit: string }): Figures {
  const { chosenRow, settings } = result;
  const sentence = element('p', 'handSentence');
  mark(sentence, 'aria-live', 'polite');
  const honest = element('p', 'fieldHelp');
  const lines = figuresOf(result.score, setting.word).map(({ name }) => {
    const value = element('td', 'figure');
    const sure = element('td', 'sure');
    const head = element('th', '', name);
    head.scope = 'row';
    return { row: element('tr', '', head, value, sure), value, sure };
  });
  const table = element(
    'table',
    'scoreTable',
    element('caption', 'unseen', 'Figures of the judged part at this threshold'),
    element('tbody', '', ...lines.map(({ row }) => row)),
  );
  return {
    root: element('div', 'figuresHost', sentence, table, honest),
    follow: (index, row) => {
      say(sentence, rowSentence(settings, row, setting.word, setting.unit));
      figuresOf(row.score, setting.word).forEach(({ value, sure }, i) => {
        const line = lines[i]!;
        if (line.value.textContent !== value) line.value.textContent = value;
        if (line.sure.textContent !== sure) line.sure.textContent = sure;
      });
      const moved =
        'Moved by hand after seeing the judged part: these figures flatter it a little, and the verdict speaks of the chosen threshold.';
      const own =
        'As chosen on the tuning part; drag the point, or use the arrow keys, to try another threshold.';
      say(honest, index === chosenRow ? own : moved);
    },
  };
}
