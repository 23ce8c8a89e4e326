/** What somebody asked for and cannot have, with the status HTTP has for it. */
export class Refused extends Error {
  readonly status: number;
  readonly code: string;
  constructor(status: number, code: string, sentence: string) {
    super(sentence);
    this.status = status;
    this.code = code;
  }
}
