import { button, element, mark, say } from '../dom.ts';
import { news$ } from '../news.ts';
import { modelList, type Picked } from './list.ts';
import * as requests from './requests.ts';
import { createSheet } from './sheet.ts';
import { createUses } from './uses.ts';
import { inOrder } from './words.ts';

const PATH = '#/models';

/** Fills `host` with the Models page: every model with its evidence, two of them side by side, who uses which. */
export function mountModels(host: HTMLElement): { visit(place: string): void; leave(): void } {
  let shown = false;
  let picked: Picked = [];
  /** counts the readings, so that a slow answer never covers a newer one */
  let reading = 0;
  const list = element('div', 'modelListPlace');
  const sheets = element('div', 'modelSheets');
  const state = element('p', 'modelState');
  mark(state, 'role', 'status');
  const again = button('Try again', '', () => void read());
  const broken = element('div', 'modelBroken', state, again);
  host.replaceChildren(element('main', 'models', element('h2', 'unseen', 'Models'), list, broken, sheets));

  const show = (sentence: string | null, retry = false) => {
    say(state, sentence);
    broken.hidden = sentence === null;
    again.hidden = !retry;
  };
  const choose = (chosen: Picked) => {
    picked = chosen;
    history.replaceState(null, '', addressOf(chosen));
    void read();
  };
  const read = async () => {
    const turn = ++reading;
    try {
      const { models, watches, channels } = await requests.surroundings();
      const known = new Set(models.map(({ name }) => name));
      picked = picked.filter((name) => known.has(name));
      const first = inOrder(models, watches)[0];
      if (picked.length === 0 && first !== undefined) picked = [first.name];
      const evidence = await Promise.all(picked.map(requests.evidenceOf));
      if (turn !== reading) return;
      const today = Date.now() / 1000;
      const kept = document.activeElement?.textContent;
      list.replaceChildren(modelList(models, watches, picked, choose));
      sheets.replaceChildren(
        ...evidence.map((model) =>
          createSheet(
            model,
            createUses(model, watches, channels, () => void read()),
            today,
          ),
        ),
      );
      mark(sheets, 'data-two', evidence.length > 1 ? 'yes' : null);
      list.hidden = models.length === 0;
      show(
        models.length === 0
          ? 'There is no model yet. Rehearse a recording and choose “Watch with these settings”, or run foreshift fit and foreshift watch --model.'
          : null,
      );
      focusAgain(list, kept ?? null);
    } catch (error) {
      if (turn === reading) show((error as Error).message, true);
    }
  };
  let lost = false;
  news$.subscribe((happening) => {
    if (happening.kind === 'closed') lost = true;
    if (happening.kind !== 'message' || happening.message.kind !== 'welcome' || !lost) return;
    lost = false;
    if (shown) void read();
  });
  return {
    visit: (place) => {
      shown = true;
      const wanted = namesAt(place);
      if (wanted.length > 0) picked = wanted;
      void read();
    },
    leave: () => {
      shown = false;
    },
  };
}

/** The models named in an address, at most two: names with their own escapes, parted by `&`. */
export function namesAt(place: string): string[] {
  return place
    .split('&')
    .filter((name) => name !== '')
    .slice(0, 2)
    .map((name) => {
      try {
        return decodeURIComponent(name);
      } catch {
        return name;
      }
    });
}

const addressOf = (picked: Picked): string =>
  picked.length === 0 ? PATH : `${PATH}/${encodeURIComponent(picked.map(encodeURIComponent).join('&'))}`;

/** The list is made anew: the button that had the focus has it again. */
function focusAgain(list: HTMLElement, words: string | null): void {
  if (document.activeElement !== document.body || words === null) return;
  const names = [...list.querySelectorAll<HTMLElement>('.modelName')];
  names.find(({ textContent }) => textContent === words)?.focus({ preventScroll: true });
}
