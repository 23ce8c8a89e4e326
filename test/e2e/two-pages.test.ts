import type { Browser, Page } from 'playwright-core';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import type { LogEntry, Warning } from '../../shared-types/warning.ts';
import type { WatchState } from '../../shared-types/watch.ts';
import {
  type Built,
  complaintsOf,
  dataFolder,
  findChromium,
  getJson,
  openBrowser,
  startBuilt,
  until,
} from './support.ts';

/** What one person does the other must see within this time (s). */
const SEEN = 1;

describe.runIf(findChromium() !== null)('two people at two pages', () => {
  const folder = dataFolder();
  let server: Built;
  let browser: Browser;
  const pages: Page[] = [];
  const complaints: string[][] = [];

  beforeAll(async () => {
    server = await startBuilt(['--demo', '--port', '0', '--data', folder.path]);
    browser = await openBrowser();
    for (const person of ['Ada', 'Ben']) {
      const context = await browser.newContext({ viewport: { width: 1440, height: 1000 } });
      const page = await context.newPage();
      complaints.push(complaintsOf(page));
      await page.goto(`http://127.0.0.1:${server.port}/`);
      await page.getByRole('heading', { name: 'Loop A' }).waitFor();
      await page.evaluate((name) => localStorage.setItem('foreshift.by', name), person);
      pages.push(page);
    }
  });

  afterAll(async () => {
    await browser?.close();
    await server?.end('SIGTERM');
    folder.remove();
  });

  const strip = (page: Page, name = 'Loop A') => page.locator(`section[aria-label="${name}"]`);
  const badge = (page: Page, name?: string) => strip(page, name).locator('.badge').textContent();
  const stateOf = async (name = 'Loop A') =>
    (await getJson<WatchState[]>(server.port, '/api/watches')).find(({ channels }) => channels[0] === name)!;
  const act = async (body: object) => {
    const { watch } = await stateOf();
    const response = await fetch(`http://127.0.0.1:${server.port}/api/watches/${watch}/actions`, {
      method: 'POST',
      headers: { 'content-type': 'application/json' },
      body: JSON.stringify(body),
    });
    expect(response.status).toBe(200);
  };
  /** A warning has just come and both pages show it: by the hold-off no other can come for ten seconds. */
  const fresh = async (name: string) => {
    const { watch } = await stateOf(name);
    await until(
      'a warning has just come',
      async () => {
        const all = await getJson<Warning[]>(server.port, '/api/warnings');
        const newest = all.findLast((warning) => warning.watch === watch && !warning.quiet);
        return newest !== undefined && Date.now() / 1000 - newest.madeAt < 2;
      },
      120,
    );
    for (const page of pages)
      await until('the page shows it', async () => /▲ unacknowledged/.test((await badge(page, name))!), 2);
  };
  const log = () => getJson<LogEntry[]>(server.port, '/api/log');

  it('see within a second that one of them has acknowledged', async () => {
    const [ada, ben] = pages as [Page, Page];
    await fresh('Loop A');
    await strip(ada).getByRole('button', { name: 'Acknowledge' }).click();
    await until('the other page shows it', async () => !/▲ unacknowledged/.test((await badge(ben))!), SEEN);
    await until('both say the same', async () => (await badge(ben)) === (await badge(ada)), SEEN);
  }, 150_000);

  it('may click at once: it is acknowledged once', async () => {
    const [ada, ben] = pages as [Page, Page];
    const before = (await log()).filter(({ kind }) => kind === 'acknowledged').length;
    await fresh('Loop B');
    // dispatched rather than clicked: the second must not wait for the button that the first makes go away
    await Promise.all(
      [ada, ben].map((page) =>
        strip(page, 'Loop B').locator('button', { hasText: 'Acknowledge' }).dispatchEvent('click'),
      ),
    );
    await until('nobody is asked', async () => (await stateOf('Loop B')).state !== 'unacknowledged', SEEN);
    const after = (await log()).filter(({ kind }) => kind === 'acknowledged').length;
    expect(after - before).toBe(1);
  }, 150_000);

  it('are both told that an alarm latches, and that it no longer does', async () => {
    const [ada, ben] = pages as [Page, Page];
    const told = async (page: Page) => /latches/.test((await strip(page).textContent())!);
    await act({ action: 'latch', on: true, by: 'Ada' });
    for (const page of [ada, ben]) await until('it is said', () => told(page), SEEN);
    await act({ action: 'latch', on: false, by: 'Ben' });
    for (const page of [ada, ben]) await until('it is no longer said', async () => !(await told(page)), SEEN);
    const said = (await log()).filter(({ kind }) => kind === 'latch').map(({ by }) => by);
    expect(said.sort()).toEqual(['Ada', 'Ben']);
  });

  it('see who shelved it and why, and either may take it off the shelf', async () => {
    const [ada, ben] = pages as [Page, Page];
    await strip(ada).click({ position: { x: 60, y: 60 } });
    await ada.keyboard.press('s');
    const dialog = ada.locator('dialog');
    await dialog.getByLabel('Why').fill('heater being changed');
    await dialog.getByLabel('By whom').fill('Ada');
    await dialog.getByRole('button', { name: 'Shelve' }).click();
    await until('it is shelved there', async () => (await badge(ben)) === '‖ shelved', SEEN);
    expect(await strip(ben).locator('.spoken').textContent()).toMatch(/heater being changed \(by Ada\)/);
    await strip(ben).getByRole('button', { name: 'Unshelve' }).click();
    await until('it is back', async () => (await badge(ada)) !== '‖ shelved', SEEN);
  });

  it('can say that a warning was acted on, which the other sees, and take it back', async () => {
    const [ada, ben] = pages as [Page, Page];
    const time = (await ada.locator('.last tbody tr').nth(2).locator('td').first().textContent())!;
    const row = ada.locator('.last tbody tr', { hasText: time }).first();
    await row.getByRole('button', { name: /acted on/ }).click();
    await ada.getByLabel('What was done').fill('heater trimmed');
    await ada.getByRole('button', { name: 'It was acted on' }).click();
    const there = ben.locator('.last tbody tr', { hasText: time }).filter({ hasText: 'heater trimmed' });
    await there.waitFor({ timeout: 1000 * SEEN });
    const acted = () =>
      getJson<Warning[]>(server.port, '/api/warnings').then((all) =>
        all.filter(({ outcome }) => outcome === 'acted'),
      );
    expect(await acted()).toMatchObject([{ acted: { by: 'Ada', text: 'heater trimmed' } }]);
    await there.getByRole('button', { name: /not acted on/ }).click();
    await ben.getByRole('button', { name: 'Take it back' }).click();
    await until('it is taken back', async () => (await acted()).length === 0, SEEN);
    expect(complaints).toEqual([[], []]);
  });
});
