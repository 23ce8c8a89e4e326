import { type ChildProcess, spawn } from 'node:child_process';
import { existsSync, mkdtempSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { type Browser, chromium, type Page } from 'playwright-core';

const MAIN = fileURLToPath(new URL('../../dist/server/commands/main.js', import.meta.url));

/** Where Chromium is, or null: then the tests in a browser are left out. */
export function findChromium(): string | null {
  const places = [
    process.env.FORESHIFT_CHROMIUM,
    '/usr/bin/chromium',
    '/usr/bin/chromium-browser',
    '/usr/bin/google-chrome',
    '/Applications/Chromium.app/Contents/MacOS/Chromium',
    '/Applications/Google Chrome.app/Contents/MacOS/Google Chrome',
  ];
  return places.find((place) => place !== undefined && existsSync(place)) ?? null;
}

const QUIET = [
  '--headless',
  '--no-sandbox',
  '--disable-gpu',
  '--disable-quic',
  '--no-first-run',
  '--disable-background-networking',
  '--disable-component-update',
  '--disable-sync',
];

export const openBrowser = (): Promise<Browser> =>
  chromium.launch({ executablePath: findChromium()!, args: QUIET });

export interface Built {
  port: number;
  process: ChildProcess;
  /** waits until it has ended */
  end(signal: 'SIGTERM' | 'SIGKILL'): Promise<number | null>;
}

/** Starts the built program's `watch` with these options and waits until it says where the page is. */
export async function startBuilt(options: string[]): Promise<Built> {
  const child = spawn(process.execPath, [MAIN, 'watch', '--no-browser', ...options], {
    stdio: ['ignore', 'pipe', 'pipe'],
    env: { ...process.env, FORESHIFT_PORT: '', FORESHIFT_DATA: '' },
  });
  let said = '';
  const ended = new Promise<number | null>((resolve) => child.once('exit', (code) => resolve(code)));
  const port = await new Promise<number>((resolve, reject) => {
    const hear = (data: Buffer) => {
      said += String(data);
      const found = /https?:\/\/127\.0\.0\.1:(\d+)\//.exec(said);
      if (found !== null) resolve(Number(found[1]));
    };
    child.stdout.on('data', hear);
    child.stderr.on('data', hear);
    ended.then((code) => reject(new Error(`the program ended with ${code}: ${said}`)));
  });
  return {
    port,
    process: child,
    end: (signal) => {
      child.kill(signal);
      return ended;
    },
  };
}

/** A data folder that is gone when the test is over. */
export function dataFolder(): { path: string; remove(): void } {
  const path = mkdtempSync(join(tmpdir(), 'foreshift-e2e-'));
  return { path, remove: () => rmSync(path, { recursive: true, force: true, maxRetries: 5 }) };
}

/** Everything a page complained of. */
export function complaintsOf(page: Page): string[] {
  const complaints: string[] = [];
  page.on('console', (message) => {
    complaints.push(`${message.type()}: ${message.text()}`);
  });
  page.on('pageerror', (error) => {
    complaints.push(error.message);
  });
  return complaints;
}

export async function getJson<T>(port: number, path: string): Promise<T> {
  const response = await fetch(`http://127.0.0.1:${port}${path}`);
  if (!response.ok) throw new Error(`${path}: ${response.status} ${await response.text()}`);
  return (await response.json()) as T;
}

/** Asks again until the answer is there. */
export async function until<T>(
  what: string,
  ask: () => Promise<T | undefined | false | null>,
  seconds: number,
): Promise<T> {
  const end = Date.now() + 1000 * seconds;
  for (;;) {
    const answer = await ask();
    if (answer) return answer;
    if (Date.now() > end) throw new Error(`after ${seconds} s still not so: ${what}`);
    await new Promise((resolve) => setTimeout(resolve, 100));
  }
}
