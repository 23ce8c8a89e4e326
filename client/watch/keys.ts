/** What the keys can do to the page. */
export interface KeyActions {
  acknowledge(): void;
  shelve(): void;
  measure(): void;
  move(by: 1 | -1): void;
  read(by: 1 | -1): void;
  span(way: 'shorter' | 'longer'): void;
  live(): void;
  help(): void;
}

/**
 * Listens for the page's keys while it is shown; leaves alone what is typed into a field, held with a modifier or meant
 * for a dialog.
 */
export function listenForKeys(shown: () => boolean, actions: KeyActions): void {
  document.addEventListener('keydown', (event) => {
    if (!shown()) return;
    const target = event.target instanceof Element ? event.target : null;
    if (event.ctrlKey || event.metaKey || event.altKey || target?.closest('input, select, textarea, dialog'))
      return;
    const run = actionOf(event.key, actions);
    if (run === null) return;
    event.preventDefault();
    run();
  });
}

/** What a key stands for; null for other keys. */
export function actionOf(key: string, actions: KeyActions): (() => void) | null {
  switch (key) {
    case 'a':
    case 'A':
      return actions.acknowledge;
    case 's':
    case 'S':
      return actions.shelve;
    case 'd':
    case 'D':
      return actions.measure;
    case 'j':
    case 'J':
    case 'ArrowDown':
      return () => actions.move(1);
    case 'k':
    case 'K':
    case 'ArrowUp':
      return () => actions.move(-1);
    case 'ArrowLeft':
      return () => actions.read(-1);
    case 'ArrowRight':
      return () => actions.read(1);
    case '+':
    case '=':
      return () => actions.span('shorter');
    case '-':
    case '−':
      return () => actions.span('longer');
    case 'Escape':
      return actions.live;
    case '?':
      return actions.help;
    default:
      return null;
  }
}
