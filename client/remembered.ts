/** A remembered word, or `otherwise`; a browser that keeps nothing is no error. */
export function recall(key: string, otherwise: string): string {
  try {
    return localStorage.getItem(`foreshift.${key}`) ?? otherwise;
  } catch {
    return otherwise;
  }
}

/** Remembers a word for the next visit where the browser allows it. */
export function remember(key: string, value: string): void {
  try {
    localStorage.setItem(`foreshift.${key}`, value);
  } catch {
    // private windows may refuse: the choice then lasts as long as the page
  }
}
