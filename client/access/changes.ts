import { mark } from '../dom.ts';

/** What a viewer is told of everything that changes something. */
export const LOOK_ONLY = 'A viewer may look, not change anything; this needs an operator’s token.';

let lookOnly = false;

/** Marks a control that changes something: a viewer sees it, is told why it does nothing, and can use everything else. */
export function changes<T extends HTMLElement>(control: T): T {
  mark(control, 'data-changes', '');
  if (lookOnly) {
    // not disabled: a disabled button cannot be reached by keyboard to learn why
    mark(control, 'aria-disabled', 'true');
    control.title = LOOK_ONLY;
  }
  return control;
}

/**
 * From now on controls that change something do nothing. To be called before any is made.
 *
 * @param told called when somebody uses one
 */
export function onlyLook(told: () => void): void {
  lookOnly = true;
  mark(document.documentElement, 'data-looks-only', '');
  const stop = (event: Event) => {
    const target = event.target as Element | null;
    if (!target?.closest('[data-changes]')) return;
    event.preventDefault();
    event.stopImmediatePropagation();
    told();
  };
  // Enter in a field presses its form's button: both come here as clicks
  document.addEventListener('click', stop, { capture: true });
}
