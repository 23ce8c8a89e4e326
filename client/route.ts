import { element, mark } from './dom.ts';
import { type Page, pageAt, type Visited } from './pages.ts';

/** The links to the pages, with the one that is open marked. */
export interface Navigation {
  root: HTMLElement;
  here(page: Page): void;
}

/** Creates the links. */
export function createNavigation(pages: readonly Page[]): Navigation {
  const links = pages.map((page) => {
    const link = element('a', '', page.name);
    link.href = page.path;
    return link;
  });
  const root = element('nav', 'pages', ...links);
  mark(root, 'aria-label', 'Pages');
  return {
    root,
    here: (page) => {
      links.forEach((link, i) => {
        link.className = pages[i] === page ? 'here' : '';
        mark(link, 'aria-current', pages[i] === page ? 'page' : null);
      });
    },
  };
}

/**
 * Shows the page that the address names, at once and whenever the address changes. A page is mounted at its first
 * visit and only hidden afterwards.
 *
 * @param watch the mounted Watch page; the other pages' bodies are put behind it
 * @param told  called with the page that is shown from now on
 */
export function route(pages: readonly Page[], watch: HTMLElement, told: (page: Page) => void): void {
  const mounted = new Map<Page, { body: HTMLElement; visited: Visited }>();
  let shown: Page | null = null;
  const show = () => {
    const { page, place } = pageAt(location.hash, pages);
    if (page.mount !== null && !mounted.has(page)) {
      const body = element('div', 'pageBody');
      watch.after(body);
      mounted.set(page, { body, visited: page.mount(body) });
    }
    if (shown !== page) {
      if (shown !== null) mounted.get(shown)?.visited.leave?.();
      shown = page;
      watch.hidden = page.mount !== null;
      for (const [each, { body }] of mounted) body.hidden = each !== page;
      told(page);
      scrollTo(0, 0);
    }
    mounted.get(page)?.visited.visit?.(place);
  };
  addEventListener('hashchange', show);
  show();
}
