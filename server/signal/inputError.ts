/**
 * A caller's or a user's mistake: one sentence in three parts (what was wrong with its value, what was expected, what
 * to do) and a stable code that can be searched for. Commands print the sentence and exit with 2.
 */
export class InputError extends RangeError {
  readonly code: string;

  constructor(code: string, sentence: string) {
    super(sentence);
    this.name = 'InputError';
    this.code = code;
  }
}
