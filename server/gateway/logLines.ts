/** One thing that happened, for whoever runs the server. The fields beside `text` are for programs; none is a secret. */
export interface LogLine {
  level: 'error' | 'warning' | 'notice';
  /** a stable name of what happened */
  event: string;
  /** a sentence */
  text: string;
  channel?: string;
  watch?: string;
  /** name of the token that was shown */
  who?: string;
  /** address of the other side */
  remote?: string;
  method?: string;
  /** without its query */
  path?: string;
  status?: number;
  /** of a WebSocket's close, or of an error */
  code?: string | number;
  /** seconds by which a clock is off, or that something took */
  seconds?: number;
}
export type Log = (line: LogLine) => void;

/**
 * Writes log lines: as sentences (what a person at the terminal must know: warnings and errors), or all of them as JSON,
 * one object a line with `time` (RFC 3339, UTC), `level`, `event`, `text` and what else is known.
 *
 * @param write takes a line with its end
 * @param now   Unix seconds
 */
export function createLog(form: 'sentences' | 'json', write: (line: string) => void, now: () => number): Log {
  if (form === 'json')
    return ({ level, event, text, ...rest }) => {
      const time = new Date(now() * 1000).toISOString();
      write(`${JSON.stringify({ time, level, event, text, ...rest })}\n`);
    };
  return ({ level, text }) => {
    if (level !== 'notice') write(`foreshift watch: ${text}\n`);
  };
}

/**
 * A log that says the same at most every so often: of what comes between, the next line tells the count.
 *
 * @param seconds least time between two lines of one event and channel or address
 * @param now     seconds that never step
 */
export function sparing(log: Log, seconds: number, now: () => number): Log {
  const said = new Map<string, { at: number; held: number }>();
  return (line) => {
    const key = [line.event, line.channel ?? '', line.remote ?? ''].join('\n');
    const last = said.get(key);
    if (last !== undefined && now() - last.at < seconds) {
      last.held++;
      return;
    }
    if (said.size > 1000) said.clear();
    said.set(key, { at: now(), held: 0 });
    const more = last === undefined || last.held === 0 ? '' : ` (and ${last.held} more like this before)`;
    log({ ...line, text: `${line.text}${more}` });
  };
}
