import type { RehearsalResult } from '../../shared-types/rehearsal.ts';
import { createCard } from '../card/card.ts';
import { button, element, mark, say } from '../dom.ts';
import { counted, plural } from '../words.ts';
import { createActions } from './actions.ts';
import { createContendersTable } from './contendersTable.ts';
import { createFigures } from './figures.ts';
import { createLeadChart } from './leadChart.ts';
import { createMapTable } from './mapTable.ts';
import { card } from './requests.ts';
import { switchWord } from './ruleForm.ts';
import { groups, judgedText, requestText, verdictWords } from './text.ts';
import { createTradeOff } from './tradeOff.ts';
import { createWholeStrip } from './wholeStrip.ts';

/** The answer of rehearsal `id`: everything that follows a threshold follows the hand. */
export function createAnswer(id: string, result: RehearsalResult, unit: string): HTMLElement {
  const word = switchWord(result.request.regime);
  const setting = { word, unit };
  const { table, chosenRow, plainRow } = result;
  let row = chosenRow;
  let due = false;

  const figures = createFigures(result, setting);
  const leads = createLeadChart(result, word);
  const trade = createTradeOff(result, setting, (next) => move(next));
  const cardPlace = element('div', 'cardPlace');
  mark(cardPlace, 'aria-live', 'polite');
  const strip = createWholeStrip(id, result, unit, (index) => open(index));
  const actions = createActions(id, result, unit);
  const root = element('section', 'answer');

  const move = (next: number) => {
    row = next;
    if (due) return;
    due = true;
    requestAnimationFrame(follow);
  };
  const follow = () => {
    due = false;
    const began = performance.now();
    const point = table.rows[row]!;
    trade.follow(row);
    figures.follow(row, point);
    leads.follow(point);
    strip.follow(point);
    actions.follow(row);
    toChosen.disabled = row === chosenRow;
    toPlain.disabled = row === plainRow;
    root.dataset.row = String(row);
    root.dataset.followed = (performance.now() - began).toFixed(2);
  };
  const toChosen = button('The chosen one', 'quiet', () => move(chosenRow));
  const toPlain = button('The plain maximum', 'quiet', () => move(plainRow));

  let wanted = -1;
  const open = (index: number) => {
    wanted = index;
    strip.ring(index);
    card(id, index, row)
      .then((found) => {
        if (wanted !== index) return;
        const shut = button('Close this card', 'quiet', () => {
          cardPlace.replaceChildren();
          strip.ring(null);
        });
        cardPlace.replaceChildren(createCard(found, { unit, switchWord: word }), walk(index), shut);
      })
      .catch((error: Error) => {
        if (wanted === index) cardPlace.replaceChildren(element('p', 'fieldFault', error.message));
      });
  };
  const walk = (index: number) => {
    const step = (by: number, words: string) => {
      const made = button(words, 'quiet', () => open(index + by));
      made.disabled = index + by < 0 || index + by >= result.switches.length;
      return made;
    };
    return element('span', 'cardWalk', step(-1, `← ${word} before`), step(1, `${word} after →`));
  };

  root.append(
    ...head(result),
    actions.root,
    element(
      'div',
      'board',
      part('What each threshold buys', 'wide', trade.root, element('p', 'handTools', toChosen, toPlain)),
      part('At this threshold', '', figures.root),
      part('Beside plain baselines', 'wide', createContendersTable(result, trade.emphasise)),
      element(
        'div',
        'pile',
        part(`How long before the ${word}`, '', leads.root),
        part('What was tried: window and rank', '', createMapTable(result)),
      ),
    ),
    part('The whole recording', 'whole', strip.root, cardPlace),
    provenance(result),
  );
  follow();
  return root;
}

function head(result: RehearsalResult): HTMLElement[] {
  const { sentence, verdict, request, fittedOnJudged, weak } = result;
  const heading = element('h2', 'answerSentence', sentence);
  heading.tabIndex = -1;
  const { sign, words } = verdictWords(verdict.kind, verdict.than);
  const signed = element('b', 'verdictSign', sign);
  mark(signed, 'aria-hidden', 'true');
  const stamp = element('strong', 'verdictWord', signed, ` ${words}`);
  const remarks: string[] = [judgedText(result)];
  if (weak)
    remarks.push('Nothing kept within what was asked for: these settings are the best there was outside it.');
  if (fittedOnJudged)
    remarks.push('The model was fitted on what is judged here, so the figures say nothing about new data.');
  const verdictLine = element('p', 'verdict', stamp, element('span', 'verdictSentence', verdict.sentence));
  mark(verdictLine, 'data-kind', verdict.kind);
  const remark = element('p', 'fieldHelp');
  say(remark, remarks.join(' '));
  return [element('p', 'asked', requestText(request)), heading, verdictLine, remark];
}

function part(title: string, name: string, ...children: Node[]): HTMLElement {
  return element('section', `part ${name}`.trimEnd(), element('h3', '', title), ...children);
}

function provenance({
  recordings,
  seconds,
  program,
  at,
  tried,
  switches,
  request,
}: RehearsalResult): HTMLElement {
  const word = switchWord(request.regime);
  const hashes = recordings.map(({ name, samples, sha256 }) =>
    element(
      'li',
      '',
      `${name.replace(/^stored:/, '')}, ${groups(samples)} samples, SHA-256 `,
      element('code', '', sha256),
    ),
  );
  const took = seconds < 10 ? seconds.toFixed(1) : seconds.toFixed(0);
  const line = `${program}, ${at.replace('T', ' ').replace(/\.\d+Z$/, ' UTC')}; ${groups(tried)} settings tried in ${took} s on ${counted(switches.length, word)} in all; seed ${request.seed}.`;
  return element(
    'details',
    'provenance',
    element('summary', '', 'Where these figures come from'),
    element('p', '', line),
    element('ul', '', ...hashes),
    element(
      'p',
      '',
      `All ${plural(word)} are stamped at their onset, warnings at the newest sample they needed.`,
    ),
  );
}
