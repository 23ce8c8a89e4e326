import type { Browser, Page } from 'playwright-core';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import type { WatchState } from '../../shared-types/watch.ts';
import { type Built, complaintsOf, dataFolder, findChromium, openBrowser, startBuilt } from './support.ts';

describe.skipIf(findChromium() === null)('the Models page of the demo, in a browser', () => {
  const folder = dataFolder();
  let server: Built;
  let browser: Browser;
  let page: Page;
  let complaints: string[] = [];
  const watches = async () =>
    (await (await fetch(`http://127.0.0.1:${server.port}/api/watches`)).json()) as WatchState[];

  beforeAll(async () => {
    server = await startBuilt(['--demo', '--port', '0', '--data', folder.path]);
    browser = await openBrowser();
    page = await browser.newPage({ viewport: { width: 1440, height: 1000 } });
    complaints = complaintsOf(page);
    await page.goto(`http://127.0.0.1:${server.port}/#/models`);
    await page.locator('.modelSheet').waitFor();
  }, 60_000);
  afterAll(async () => {
    await browser?.close();
    await server?.end('SIGTERM');
    folder.remove();
  });

  it('lists each model with its channel and what rehearsal said, and reads one of them', async () => {
    const rows = page.locator('.modelList tbody tr');
    expect(await rows.count()).toBe(2);
    expect(await page.locator('.modelList').textContent()).toMatch(/Loop A: in use[\s\S]*came true/);
    const sheet = await page.locator('.modelSheet').textContent();
    for (const part of ['Singular values', 'Linear model', 'The forcing', 'On data held out', 'SHA-256'])
      expect(sheet).toContain(part);
    const dots = page.locator('.modelSheet circle.kept');
    expect(await dots.count()).toBe(2);
    const floor = (await page.locator('.modelSheet .noiseFloor').boundingBox())!;
    expect((await dots.first().boundingBox())!.y).toBeLessThan(floor.y);
  });

  it('tells a coefficient by the keyboard', async () => {
    await page.locator('.coefficients td[tabindex="0"]').focus();
    await page.keyboard.press('ArrowRight');
    const words = await page
      .locator('.coefficients')
      .locator('xpath=../..')
      .locator('.evidenceWords')
      .textContent();
    expect(words).toMatch(/^dv₁\/dt: −?[\d.]+ per second times the forcing$/);
  });

  it('lays two beside each other, and an address leads there again', async () => {
    // clicked, not checked: the list is made anew by it
    await page.locator('.modelList input:not(:checked)').first().click();
    await expect.poll(() => page.locator('.modelSheet').count()).toBe(2);
    const address = page.url();
    await page.goto('about:blank');
    await page.goto(address);
    await expect.poll(() => page.locator('.modelSheet').count()).toBe(2);
    const [left, right] = await page.locator('.modelSheet').all();
    expect((await left!.boundingBox())!.x).toBeLessThan((await right!.boundingBox())!.x);
    await page.locator('.modelName').first().click();
    await expect.poll(() => page.locator('.modelSheet').count()).toBe(1);
  });

  it('begins a trial beside the watch in use, which asks nobody, and takes it out of use again', async () => {
    const before = (await watches()).length;
    await page.getByRole('button', { name: 'Watch on trial' }).click();
    await expect.poll(async () => (await watches()).length).toBe(before + 1);
    const trial = (await watches()).find(({ use }) => use === 'on trial')!;
    expect(trial.state).toBe('normal');
    const line = page.locator('.use', { hasText: ', trial”' });
    await line.getByRole('button', { name: 'Take out of use' }).click();
    await expect
      .poll(async () => (await watches()).find(({ watch }) => watch === trial.watch)?.use)
      .toBe('taken out of use');
    await page.locator('.use', { hasText: 'sees nothing' }).waitFor();
  });

  it('fits a phone without sideways scrolling of the page, and complains of nothing', async () => {
    await page.setViewportSize({ width: 360, height: 740 });
    expect(await page.evaluate(() => document.documentElement.scrollWidth)).toBeLessThanOrEqual(360);
    expect(complaints).toEqual([]);
  });

  it('says so when the server cannot be reached, and reads again when it is back', async () => {
    await page.setViewportSize({ width: 1440, height: 1000 });
    const { port } = server;
    await server.end('SIGKILL');
    await page.locator('.modelName').first().click();
    await page.locator('.modelState').filter({ hasText: 'cannot be reached' }).waitFor();
    server = await startBuilt(['--demo', '--port', String(port), '--data', folder.path]);
    await page.locator('.modelState').waitFor({ state: 'hidden', timeout: 20_000 });
    expect(await page.locator('.modelSheet').count()).toBe(1);
  });
});
