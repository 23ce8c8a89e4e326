/** An element with a class and children; strings become text. */
export function element<K extends keyof HTMLElementTagNameMap>(
  tag: K,
  className = '',
  ...children: (Node | string)[]
): HTMLElementTagNameMap[K] {
  const made = document.createElement(tag);
  if (className !== '') made.className = className;
  made.append(...children);
  return made;
}

/** Sets an element's text if it differs, and hides the element when there is none. */
export function say(target: HTMLElement, text: string | null): void {
  if (target.hidden !== (text === null || text === '')) target.hidden = text === null || text === '';
  if (target.textContent !== (text ?? '')) target.textContent = text ?? '';
}

/** Sets an attribute if it differs; null removes it. */
export function mark(target: Element, name: string, value: string | null): void {
  if (target.getAttribute(name) === value) return;
  if (value === null) target.removeAttribute(name);
  else target.setAttribute(name, value);
}

/** A button that runs something. */
export function button(text: string, className: string, run: () => void): HTMLButtonElement {
  const made = element('button', className, text);
  made.type = 'button';
  made.addEventListener('click', run);
  return made;
}

/** The local monotonic clock, seconds. */
export function monotonic(): number {
  return performance.now() / 1000;
}
