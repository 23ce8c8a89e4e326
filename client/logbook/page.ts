import type { ChannelState } from '../../shared-types/channel.ts';
import type { WatchState } from '../../shared-types/watch.ts';
import { button, element, mark, say } from '../dom.ts';
import { news$ } from '../news.ts';
import { createFiguresPanel } from './figuresPanel.ts';
import { EVERYTHING, type Filter, filterAt, letsAllThrough, placeOf } from './filter.ts';
import { createFilterBar } from './filterBar.ts';
import { listenForKeys } from './keys.ts';
import { createNoteForm } from './noteForm.ts';
import { createReader } from './reader.ts';
import { surroundings, warningTimes } from './requests.ts';
import { createTable } from './table.ts';

const PATH = '#/logbook';
/** The figures are made anew no sooner than after these milliseconds. */
const FIGURES_EVERY = 10_000;
/** The next page is asked for when its place is this many pixels below the window. */
const AHEAD = 1500;

/** Fills `host` with the Logbook page. */
export function mountLogbook(host: HTMLElement): { visit(place: string): void; leave(): void } {
  let filter: Filter = EVERYTHING;
  let shown = false;
  let lost = false;
  let channels: ChannelState[] = [];
  let watches: WatchState[] = [];

  const bar = createFilterBar((chosen) => choose(chosen));
  const note = createNoteForm();
  const figures = createFiguresPanel();
  const table = createTable({
    horizonOf: (id) => watches.find(({ watch }) => watch === id)?.rule?.horizon ?? null,
    unitOf: (name) => channels.find(({ channel }) => channel === name)?.unit ?? '',
    switchWordOf: (id) => watches.find(({ watch }) => watch === id)?.switchWord ?? 'switch',
  });
  const foot = createFoot(() => (foot.can === 'everything' ? choose(EVERYTHING) : void reader.older()));
  const reader = createReader(table, () => {
    foot.show(reader.standing(), table.lines.entries.length, filter);
    table.root.hidden = table.lines.entries.length === 0;
    reach();
  });
  const exports = createExports();
  host.replaceChildren(
    element(
      'main',
      'logbook',
      element('h2', 'unseen', 'Logbook'),
      element('div', 'logTop', figures.root, note.root),
      bar.root,
      exports.root,
      table.root,
      foot.root,
    ),
  );

  const look = (chosen: Filter) => {
    filter = chosen;
    void reader.look(chosen);
    exports.of(reader.query());
  };
  const choose = (chosen: Filter) => {
    bar.set(chosen);
    history.replaceState(null, '', addressOf(chosen));
    look(chosen);
  };
  /** Asks for the next page while its place is near the window. */
  const reach = () => {
    const standing = reader.standing();
    if (!shown || standing.kind !== 'read' || !standing.older) return;
    if (foot.root.getBoundingClientRect().top < innerHeight + AHEAD) void reader.older();
  };
  addEventListener('scroll', reach, { passive: true });
  addEventListener('resize', reach);
  const count = seldom(FIGURES_EVERY, async () => {
    if (!shown) return;
    try {
      figures.show(await warningTimes(), watches);
    } catch (error) {
      figures.fail(error instanceof Error ? error.message : String(error));
    }
  });
  const learn = async () => {
    try {
      ({ channels, watches } = await surroundings());
      bar.know(channels, watches);
      note.know(channels);
    } catch {
      // the lines themselves say that the server cannot be reached
    }
  };
  const arrive = async (anew: boolean) => {
    await learn();
    count();
    if (anew || table.lines.entries.length === 0) look(filter);
    else await reader.catchUp();
  };
  news$.subscribe((happening) => {
    if (happening.kind === 'closed') lost = true;
    if (happening.kind !== 'message' || !shown) return;
    if (happening.message.kind === 'welcome' && lost) {
      lost = false;
      void arrive(false);
    }
    reader.hear(happening.message);
    if (happening.message.kind === 'warning' || happening.message.kind === 'watch') count();
  });
  listenForKeys(() => shown, table.root, {
    search: () => bar.focusText(),
    note: () => note.focus(),
    move: (by) => table.move(by),
  });

  return {
    visit: (place) => {
      const wanted = filterAt(place);
      const other = placeOf(wanted) !== placeOf(filter);
      const came = !shown;
      shown = true;
      lost = false;
      if (other) {
        filter = wanted;
        bar.set(wanted);
      }
      if (came || other) void arrive(other);
    },
    leave: () => {
      shown = false;
    },
  };
}

const addressOf = (filter: Filter) => {
  const place = placeOf(filter);
  return place === '' ? PATH : `${PATH}/${encodeURIComponent(place)}`;
};

/** Runs something when asked to, but no sooner than `milliseconds` after the last time, and then once. */
function seldom(milliseconds: number, run: () => Promise<void>): () => void {
  let last = Number.NEGATIVE_INFINITY;
  let waiting = false;
  return () => {
    if (waiting) return;
    waiting = true;
    setTimeout(
      () => {
        waiting = false;
        last = performance.now();
        void run();
      },
      Math.max(0, last + milliseconds - performance.now()),
    );
  };
}

/** The end of the table: how far it reaches, and the button that goes on from there. */
function createFoot(pressed: () => void) {
  const state = element('p', 'logState');
  mark(state, 'role', 'status');
  const more = button('Older lines', '', pressed);
  const foot = {
    root: element('div', 'logFoot', state, more),
    /** what the button does */
    can: null as 'older' | 'again' | 'everything' | null,
    show(standing: ReturnType<ReturnType<typeof createReader>['standing']>, lines: number, filter: Filter) {
      const [words, can] = standingWords(standing, lines, filter);
      foot.can = can;
      say(state, words);
      say(
        more,
        can === null
          ? null
          : { older: 'Older lines', again: 'Try again', everything: 'Show everything' }[can],
      );
    },
  };
  return foot;
}

function standingWords(
  standing: ReturnType<ReturnType<typeof createReader>['standing']>,
  lines: number,
  filter: Filter,
): [string | null, 'older' | 'again' | 'everything' | null] {
  if (standing.kind === 'failed') return [standing.why, 'again'];
  if (standing.kind === 'reading')
    return [lines === 0 ? 'Reading the logbook …' : 'Reading older lines …', null];
  if (standing.older)
    return [lines === 0 ? 'Nothing found yet; there are older lines to look through.' : null, 'older'];
  if (lines > 0)
    return [letsAllThrough(filter) ? 'The logbook begins here.' : 'No older line matches the filter.', null];
  return letsAllThrough(filter)
    ? [
        'Nothing is in the logbook yet. Warnings, switches, gaps, notes and what people do will stand here.',
        null,
      ]
    : ['No line matches the filter.', 'everything'];
}

/** Links to all lines that the filter lets through, as files. */
function createExports() {
  const link = (words: string) => {
    const made = element('a', '', words);
    mark(made, 'download', '');
    return made;
  };
  const [csv, json] = [link('Export as CSV'), link('as JSON')];
  const what = element('small', '', ' every line that the filter lets through, newest first');
  const keys = element('small', '', 'Keys: / text, N note, J K or ↓ ↑ lines, Enter opens a line');
  return {
    root: element('p', 'logExport', element('span', '', csv, ' · ', json, what), keys),
    of: (query: URLSearchParams) => {
      csv.href = `/api/log.csv?${query}`;
      json.href = `/api/log.json?${query}`;
    },
  };
}
