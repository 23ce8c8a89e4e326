import { mountLogbook } from './logbook/page.ts';
import { mountModels } from './models/page.ts';
import { mountRehearse } from './rehearse/page.ts';

/** A page beside Watch. */
export interface Page {
  /** as the navigation and the window's title call it */
  name: string;
  /** its address within the program: `#/` and a word */
  path: string;
  /** Fills `host` when the page is first visited; null: Watch, which is always there and keeps its clock. */
  mount: ((host: HTMLElement) => Visited) | null;
}

/** What a mounted page does whenever somebody comes to it, or comes to another place of it. */
export interface Visited {
  /** `place`: what follows the page's path in the address, without its slash; '' for the page itself */
  visit?(place: string): void;
  /** another page is shown now: stop what only the eye needs */
  leave?(): void;
}

/** The pages, in the order of the navigation. */
export const PAGES: readonly Page[] = [
  { name: 'Watch', path: '#/', mount: null },
  { name: 'Rehearse', path: '#/rehearse', mount: mountRehearse },
  { name: 'Models', path: '#/models', mount: mountModels },
  { name: 'Logbook', path: '#/logbook', mount: mountLogbook },
];

/** The page an address (`#/rehearse/12`) leads to, and the place within it; the first page where there is none. */
export function pageAt(hash: string, pages: readonly Page[]): { page: Page; place: string } {
  for (const page of pages) {
    if (page.mount === null) continue;
    if (hash === page.path) return { page, place: '' };
    if (hash.startsWith(`${page.path}/`)) return { page, place: placeOf(hash.slice(page.path.length + 1)) };
  }
  return { page: pages[0]!, place: '' };
}

function placeOf(text: string): string {
  try {
    return decodeURIComponent(text);
  } catch {
    return text;
  }
}
