import type { Browser, Page } from 'playwright-core';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import type { LogbookPage } from '../../shared-types/logbook.ts';
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

const ROWS = '.logRow[data-key]';

describe.runIf(findChromium() !== null)('the Logbook page of the demo, in a browser', () => {
  const folder = dataFolder();
  let server: Built;
  let browser: Browser;
  let page: Page;
  let complaints: string[];

  beforeAll(async () => {
    server = await startBuilt(['--demo', '--port', '0', '--data', folder.path]);
    browser = await openBrowser();
    page = await browser.newPage({ viewport: { width: 1440, height: 900 } });
    complaints = complaintsOf(page);
    await page.goto(`http://127.0.0.1:${server.port}/`);
    await page.getByRole('link', { name: 'Logbook' }).click();
    await page.locator(ROWS).first().waitFor();
  });

  afterAll(async () => {
    await browser?.close();
    await server?.end('SIGTERM');
    folder.remove();
  });

  const kindsShown = () =>
    page.locator(ROWS).evaluateAll((rows) => rows.map((row) => row.getAttribute('data-kind')));
  const only = async (kind: string) => {
    const kinds = await kindsShown();
    return kinds.length > 1 && kinds.every((each) => each === kind);
  };
  const everything = async () => {
    await page.getByRole('search').getByRole('button', { name: 'Show everything' }).click();
    await until('all kinds again', async () => new Set(await kindsShown()).size > 2, 5);
  };

  it('has the lines of the server, newest first, in a table that a screen reader can read', async () => {
    const { entries } = await getJson<LogbookPage>(server.port, '/api/logbook?most=1000');
    const shown = await page
      .locator(ROWS)
      .evaluateAll((rows) => rows.map((row) => row.getAttribute('data-key')));
    const old = entries.map(({ key }) => key).filter((key) => shown.includes(key));
    expect(old.length).toBeGreaterThan(10);
    expect(shown.filter((key) => old.includes(key!))).toEqual(old);
    const table = page.getByRole('table', { name: 'The logbook, newest first' });
    expect(await table.getByRole('columnheader').allTextContents()).toEqual([
      'Time (UTC)',
      'What',
      'Channel',
      'In words',
      'What became of it',
      'Look',
    ]);
    const row = table.getByRole('row').filter({ hasText: 'reversal, upward' }).first();
    expect(await row.getByRole('cell').count()).toBe(6);
  });

  it('filters by kind, channel and words, remembers the filter in its address, and exports what it lets through', async () => {
    await page.getByRole('checkbox', { name: 'switches' }).check();
    await until('switches alone', () => only('switch'), 5);
    await page.getByRole('search').getByLabel('Channel').selectOption('Loop B');
    await page.getByRole('search').getByLabel('Text').fill('UPWARD');
    await until(
      'upward ones of Loop B alone',
      async () =>
        (await page.locator(`${ROWS} .logText`).allTextContents()).every((text) => /upward/.test(text)) &&
        (await page.locator(`${ROWS} .logWhere`).allTextContents()).every((text) => text === 'Loop B'),
      5,
    );
    const rows = await page.locator(ROWS).count();
    expect(rows).toBeGreaterThan(0);
    const csv = await page.getByRole('link', { name: 'Export as CSV' }).getAttribute('href');
    const text = await (await fetch(`http://127.0.0.1:${server.port}${csv}`)).text();
    const records = text.trimEnd().split('\r\n').slice(1);
    expect(records.length).toBeGreaterThanOrEqual(rows);
    expect(records.every((record) => record.includes(',switch,Loop B,Loop B,'))).toBe(true);
    await page.reload();
    await until('the same filter after reloading', async () => (await page.locator(ROWS).count()) >= rows, 5);
    expect(await page.getByRole('checkbox', { name: 'switches' }).isChecked()).toBe(true);
    expect(new Set(await kindsShown())).toEqual(new Set(['switch']));

    await page.getByRole('search').getByLabel('Text').fill('words that nobody wrote');
    await page.getByText('No line matches the filter.').waitFor();
    await everything();
  });

  it('takes a note, which stands in the table at once, and shows one that another page wrote', async () => {
    await page.getByLabel('Note', { exact: true }).fill('trimmed the heater');
    await page.getByRole('form', { name: 'Add a note' }).getByLabel('Of channel').selectOption('Loop A');
    await page.getByLabel('By', { exact: true }).fill('A. Person');
    await page.getByRole('button', { name: 'Add note' }).click();
    const row = page.locator(`${ROWS}[data-kind="note"]`, { hasText: 'trimmed the heater' });
    await row.waitFor({ timeout: 5000 });
    expect(await row.locator('.logWhere').textContent()).toBe('Loop A');
    expect(await row.locator('.logBecame').textContent()).toBe('by A. Person');
    const body = JSON.stringify({ text: 'seen from elsewhere <b>&amp;</b>' });
    await fetch(`http://127.0.0.1:${server.port}/api/notes`, { method: 'POST', body });
    await page.locator(ROWS, { hasText: 'seen from elsewhere <b>&amp;</b>' }).waitFor({ timeout: 5000 });
  });

  it('opens the card of a switch: words, two drawn lines, and values read off by the arrow keys', async () => {
    // by its key: while one reads, newer lines come above it
    const second = page.locator(`${ROWS}[data-kind="switch"]`, { hasText: 'warned' }).nth(1);
    const row = page.locator(`.logRow[data-key="${await second.getAttribute('data-key')}"]`);
    const open = row.getByRole('button', { name: /^Card of the switch/ });
    await open.click();
    const card = page.locator('.card');
    await card.waitFor({ timeout: 5000 });
    expect(await open.getAttribute('aria-expanded')).toBe('true');
    expect(await card.locator('h3').textContent()).toMatch(/^Reversal of Loop [AB] at \d\d:\d\d:\d\d\.\d$/);
    expect(await card.locator('.cardOutcome').textContent()).toMatch(
      /^Warned \d+ s before, at \d\d:\d\d:\d\d\.\d\.$/,
    );
    const lines = await card
      .locator('.cardLine')
      .evaluateAll((paths) => paths.map((path) => (path as SVGPathElement).getTotalLength()));
    expect(lines).toHaveLength(2);
    for (const length of lines) expect(length).toBeGreaterThan(300);
    await card.locator('.cardDrawing').focus();
    await page.keyboard.press('ArrowLeft');
    await page.keyboard.press('ArrowLeft');
    expect(await card.locator('.cardReading').textContent()).toMatch(
      /s before: Loop [AB] −?\d+(\.\d+)? K, forcing \d\.\d\d sd/,
    );
    await open.click();
    expect(await card.count()).toBe(0);
  });

  it('is worked by keys: to the text, to the lines, and into a line', async () => {
    await page.evaluate(() => (document.activeElement as HTMLElement | null)?.blur());
    await page.keyboard.press('/');
    await page.keyboard.type('reversal, ');
    await until('switches found', () => only('switch'), 5);
    await page.evaluate(() => (document.activeElement as HTMLElement | null)?.blur());
    await page.keyboard.press('j');
    await page.keyboard.press('ArrowDown');
    const second = await page.locator(ROWS).nth(1).getAttribute('data-key');
    expect(await page.evaluate(() => (document.activeElement as HTMLElement | null)?.dataset.key)).toBe(
      second,
    );
    await page.keyboard.press('Enter');
    await page.locator('.card').waitFor({ timeout: 5000 });
    await everything();
  });

  it('leads to the strip at that moment, with the marks of that time', async () => {
    const row = page.locator(`${ROWS}[data-kind="switch"]`, { hasText: 'Loop B' }).last();
    const time = (await row.locator('time').textContent())!;
    await row.getByRole('link', { name: /^Strip of Loop B/ }).click();
    const notice = page.locator('.notice.zoomed');
    await notice.waitFor({ timeout: 5000 });
    const [, from, to] = /at (\S+) to (\S+),/.exec((await notice.textContent())!)!;
    expect(time > from! && time < to!).toBe(true);
    expect(
      await page.evaluate(() => document.activeElement?.closest('section')?.getAttribute('aria-label')),
    ).toBe('Loop B');
    await page.keyboard.press('Escape');
    await notice.waitFor({ state: 'hidden' });
    await page.getByRole('link', { name: 'Logbook' }).click();
    await page.locator(ROWS).first().waitFor();
  });

  it('needs no sideways scrolling on a phone, and labels every field', async () => {
    await page.setViewportSize({ width: 360, height: 740 });
    const wide = await page.evaluate(() => document.documentElement.scrollWidth);
    expect(wide).toBeLessThanOrEqual(360);
    const unlabelled = await page.locator('.logbook').evaluate((root) =>
      [...root.querySelectorAll<HTMLInputElement>('input, select, button')]
        .filter((field) => field.checkVisibility())
        .filter((field) => !field.labels?.length && !field.textContent?.trim() && !field.ariaLabel)
        .map((field) => field.outerHTML),
    );
    expect(unlabelled).toEqual([]);
    await page.setViewportSize({ width: 1440, height: 900 });
  });

  it('complains of nothing, and catches up when a killed server is back', async () => {
    expect(complaints).toEqual([]);
    const { port } = server;
    const newest = await page.locator(ROWS).first().getAttribute('data-key');
    await server.end('SIGKILL');
    await page.locator('.notice.lost').waitFor({ timeout: 5000 });
    server = await startBuilt(['--demo', '--port', String(port), '--data', folder.path]);
    await page.locator('.notice.lost').waitFor({ state: 'hidden', timeout: 20_000 });
    await until(
      'the start of the server stands above what was known',
      async () => {
        const keys = await page
          .locator(ROWS)
          .evaluateAll((rows) => rows.map((row) => [row.getAttribute('data-key'), row.textContent]));
        const started = keys.findIndex(([, text]) => /foreshift .* started/.test(text!));
        return started >= 0 && started < keys.findIndex(([key]) => key === newest);
      },
      20,
    );
  }, 90_000);
});

describe.runIf(findChromium() !== null)('the Logbook page of a server that fails, in a browser', () => {
  it('says why and tries again when asked to', async () => {
    const folder = dataFolder();
    const server = await startBuilt(['--port', '0', '--data', folder.path]);
    const browser = await openBrowser();
    try {
      const page = await browser.newPage();
      await page.route('**/api/logbook?*', (route) =>
        route.fulfill({
          status: 500,
          contentType: 'application/problem+json',
          body: JSON.stringify({ detail: 'the disk is full; make room and try again' }),
        }),
      );
      await page.goto(`http://127.0.0.1:${server.port}/#/logbook`);
      await page.getByText('the disk is full; make room and try again').waitFor();
      await page.unroute('**/api/logbook?*');
      await page.getByRole('button', { name: 'Try again' }).click();
      await page.locator(ROWS, { hasText: 'started' }).waitFor({ timeout: 5000 });
      await page.getByText('The logbook begins here.').waitFor();
      expect(await page.getByText('Nobody was called').textContent()).toMatch(/in \d/);
    } finally {
      await browser.close();
      await server.end('SIGTERM');
      folder.remove();
    }
  });
});
