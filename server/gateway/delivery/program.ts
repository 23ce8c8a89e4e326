import { type ChildProcess, spawn } from 'node:child_process';
import type { Attempt, Send } from './attempt.ts';
import type { CloudEvent } from './cloudEvent.ts';

export interface ProgramNeeds {
  /** program and arguments; no shell reads them */
  command: readonly string[];
  /** where it runs: the data folder */
  folder: string;
  /** seconds it may take */
  timeLimit: number;
  /** the server's own environment */
  environment: NodeJS.ProcessEnv;
}

/** What of the server's environment a program gets: nothing that could hold a secret. */
const PASSED_ON = ['PATH', 'HOME', 'USER', 'LANG', 'LC_ALL', 'TZ', 'TMPDIR', 'SystemRoot', 'TEMP'];
/** So much of the end of what it says on standard error is told. */
const SAID_CHARACTERS = 300;
/** seconds between asking a program to end and ending it */
const GRACE_SECONDS = 2;
/** A program that has ended is heard out for so long. */
const LAST_WORDS_MILLISECONDS = 200;

function environmentOf({ id, type, data }: CloudEvent, own: NodeJS.ProcessEnv): NodeJS.ProcessEnv {
  const { watch, channels, at, from, to, outcome } = data as Record<string, unknown>;
  return {
    ...Object.fromEntries(PASSED_ON.flatMap((name) => (own[name] === undefined ? [] : [[name, own[name]]]))),
    FORESHIFT_EVENT: id,
    FORESHIFT_TYPE: type,
    FORESHIFT_WATCH: String(watch),
    FORESHIFT_CHANNEL: String((channels as string[])[0]),
    FORESHIFT_AT: String(at),
    FORESHIFT_FROM: String(from),
    FORESHIFT_TO: String(to),
    FORESHIFT_OUTCOME: String(outcome),
  };
}

/** Ends a program and what it started, where the system has process groups. */
function end(child: ChildProcess, signal: 'SIGTERM' | 'SIGKILL'): void {
  try {
    if (process.platform === 'win32') child.kill(signal);
    else process.kill(-child.pid!, signal);
  } catch {
    // it has ended meanwhile
  }
}

function ended(code: number | null, signal: string | null, said: string): Attempt {
  if (code === 0) return { kind: 'delivered', text: 'the program ended well' };
  const how = code === null ? `was ended by ${signal}` : `ended with ${code}`;
  const words = said.replace(/\s+/g, ' ').trim();
  return { kind: 'refused', text: `the program ${how}${words === '' ? '' : `: ${words}`}` };
}

/**
 * Runs a program for each message: the CloudEvent's JSON on its standard input, a few of its facts in the environment.
 * Exit code 0: delivered. A program that failed is not run again, for it may have done half of its work; only a server
 * that stopped or crashed before it ended runs it again.
 */
export function createProgram({ command, folder, timeLimit, environment }: ProgramNeeds): Send {
  const [program, ...given] = command as [string, ...string[]];
  return (body, stopped) =>
    new Promise((resolve) => {
      if (stopped.aborted) {
        resolve({ kind: 'again', text: 'the server stopped before it ran', after: null });
        return;
      }
      const env = environmentOf(JSON.parse(body) as CloudEvent, environment);
      const child = spawn(program, given, {
        cwd: folder,
        env,
        stdio: ['pipe', 'ignore', 'pipe'],
        shell: false,
        detached: process.platform !== 'win32',
        windowsHide: true,
      });
      let said = '';
      let cut: 'time' | 'stop' | null = null;
      let killing: NodeJS.Timeout | undefined;
      const stop = (reason: 'time' | 'stop') => {
        cut ??= reason;
        end(child, 'SIGTERM');
        killing ??= setTimeout(() => end(child, 'SIGKILL'), 1000 * GRACE_SECONDS);
      };
      const onStop = () => stop('stop');
      const limit = setTimeout(() => stop('time'), 1000 * timeLimit);
      stopped.addEventListener('abort', onStop);
      const settle = (attempt: Attempt) => {
        clearTimeout(limit);
        clearTimeout(killing);
        stopped.removeEventListener('abort', onStop);
        resolve(attempt);
      };
      child.stderr.setEncoding('utf8').on('data', (part: string) => {
        said = (said + part).slice(-SAID_CHARACTERS);
      });
      // one that does not read is no fault of the message
      child.stdin.on('error', () => {});
      child.stdin.end(body);
      child.on('error', (error: NodeJS.ErrnoException) =>
        settle({ kind: 'refused', text: `the program cannot be run (${error.code ?? error.message})` }),
      );
      child.on('exit', (code, signal) => {
        if (cut !== null) end(child, 'SIGKILL');
        const finish = () => settle(verdict(code, signal));
        // what it left running may hold its standard error open for ever
        child.once('close', finish);
        setTimeout(finish, LAST_WORDS_MILLISECONDS).unref();
      });
      const verdict = (code: number | null, signal: string | null): Attempt => {
        if (cut === 'stop') return { kind: 'again', text: 'the server stopped before it ended', after: null };
        if (cut === null) return ended(code, signal, said);
        return { kind: 'refused', text: `the program took longer than ${timeLimit} s and was ended` };
      };
    });
}
