/** What the keys can do to the page. */
export interface LogKeys {
  search(): void;
  note(): void;
  move(by: 1 | -1): void;
}

/** What a key stands for; null for other keys. */
export function actionOf(key: string, actions: LogKeys): (() => void) | null {
  switch (key) {
    case '/':
      return actions.search;
    case 'n':
    case 'N':
      return actions.note;
    case 'j':
    case 'J':
      return () => actions.move(1);
    case 'k':
    case 'K':
      return () => actions.move(-1);
    default:
      return null;
  }
}

/** Listens for the page's keys while it is shown, and for arrows and Enter on the rows of its table. */
export function listenForKeys(shown: () => boolean, table: HTMLElement, actions: LogKeys): void {
  document.addEventListener('keydown', (event) => {
    const target = event.target instanceof Element ? event.target : null;
    if (!shown() || event.ctrlKey || event.metaKey || event.altKey) return;
    if (target?.closest('input, select, textarea, dialog')) return;
    const run = actionOf(event.key, actions);
    if (run === null) return;
    event.preventDefault();
    run();
  });
  table.addEventListener('keydown', (event) => {
    const row = event.target instanceof Element ? event.target.closest<HTMLElement>('.logRow') : null;
    if (row === null || event.defaultPrevented) return;
    if (event.key === 'ArrowDown' || event.key === 'ArrowUp') {
      event.preventDefault();
      actions.move(event.key === 'ArrowDown' ? 1 : -1);
    } else if (event.key === 'Enter' && event.target === row)
      (
        row.querySelector<HTMLElement>('.logDo button') ?? row.querySelector<HTMLElement>('.logDo a')
      )?.click();
  });
}
