import { execFileSync, spawnSync } from 'node:child_process';
import { mkdirSync } from 'node:fs';
import { join } from 'node:path';
import type { Browser, Page } from 'playwright-core';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { createToken, readTokens, withdrawToken } from '../../server/gateway/access/accessTokens.ts';
import { type Built, complaintsOf, dataFolder, findChromium, openBrowser, startBuilt } from './support.ts';

/** A folder that pictures of the pages are put into, to be looked at; unset: none are taken. */
const PICTURES = process.env.FORESHIFT_PICTURES;
const picture = async (page: Page, name: string) => {
  if (PICTURES) await page.screenshot({ path: join(PICTURES, `${name}.png`) });
};
const hasOpenssl = spawnSync('openssl', ['version']).status === 0;

/** A certificate for localhost and 127.0.0.1 that lasts a day. */
function makeCertificate(folder: string): { certificate: string; key: string } {
  mkdirSync(folder, { recursive: true });
  const [certificate, key] = [join(folder, 'certificate.pem'), join(folder, 'key.pem')];
  const names = ['-subj', '/CN=localhost', '-addext', 'subjectAltName=DNS:localhost,IP:127.0.0.1'];
  const made = ['-x509', '-newkey', 'ec', '-pkeyopt', 'ec_paramgen_curve:prime256v1', '-noenc', '-days', '1'];
  execFileSync('openssl', ['req', ...made, ...names, '-keyout', key, '-out', certificate], {
    stdio: 'ignore',
  });
  return { certificate, key };
}

describe.skipIf(findChromium() === null || !hasOpenssl)('signing in, over TLS, with a real browser', () => {
  const data = dataFolder();
  const token = { operator: '', viewer: '' };
  let built: Built;
  let browser: Browser;
  let address: string;

  beforeAll(async () => {
    for (const role of ['operator', 'viewer'] as const)
      token[role] = createToken(data.path, { name: `the ${role}`, role, channels: null }, new Date());
    const { certificate, key } = makeCertificate(join(data.path, 'tls'));
    built = await startBuilt([
      ...['--port', '0', '--data', data.path, '--listen', '0.0.0.0', '--name', '127.0.0.1', '--demo'],
      ...['--certificate', certificate, '--key', key],
    ]);
    address = `https://127.0.0.1:${built.port}`;
    browser = await openBrowser();
  }, 120_000);
  afterAll(async () => {
    await browser?.close();
    await built?.end('SIGTERM');
    data.remove();
  });

  const open = async (options: { dark?: boolean; width?: number } = {}, hash = '') => {
    const context = await browser.newContext({
      ignoreHTTPSErrors: true,
      colorScheme: options.dark ? 'dark' : 'light',
      viewport: { width: options.width ?? 1280, height: 900 },
    });
    const page = await context.newPage();
    const complaints = complaintsOf(page);
    await page.goto(`${address}/${hash}`);
    return { context, page, complaints };
  };
  const welcomed = (page: Page) => page.waitForSelector('#page[data-welcomed]', { timeout: 30_000 });

  it('asks for a token, says in a sentence when there is none such, and lets in by keyboard alone', async () => {
    const { context, page } = await open();
    await page.waitForSelector('.signIn');
    await picture(page, 'sign-in');
    expect(await page.evaluate(() => document.activeElement?.getAttribute('name'))).toBe('token');
    await page.keyboard.type('not a token');
    await page.keyboard.press('Enter');
    await page.waitForSelector('.signIn .fault:not([hidden])');
    expect(await page.textContent('.signIn .fault')).toBe(
      'There is no such token here, or it was withdrawn; ask who runs this server for one.',
    );
    await picture(page, 'sign-in-refused');
    await page.keyboard.type(token.operator);
    await page.keyboard.press('Enter');
    await welcomed(page);
    expect(await page.textContent('.signedIn')).toContain('the operator, an operator.');
    const [cookie] = await context.cookies();
    expect(cookie).toMatchObject({
      name: `__Host-foreshift-${built.port}`,
      httpOnly: true,
      secure: true,
      sameSite: 'Strict',
    });
    await context.close();
  });

  it('stays signed in over a reload, on every page, with nothing the policy would block', async () => {
    const { context, page, complaints } = await open({}, `#token=${token.operator}`);
    await welcomed(page);
    expect(page.url()).not.toContain(token.operator);
    expect(await page.evaluate(() => JSON.stringify(localStorage) + document.cookie)).not.toContain(
      token.operator,
    );
    await page.reload();
    await welcomed(page);
    for (const path of ['rehearse', 'models', 'logbook']) {
      await page.goto(`${address}/#/${path}`);
      await page.waitForTimeout(700);
    }
    await page.goto(`${address}/#/`);
    await page.waitForSelector('.strip canvas');
    await page.keyboard.press('?');
    await page.waitForSelector('dialog[open]');
    await page.keyboard.press('Escape');
    await picture(page, 'operator');
    expect(complaints).toEqual([]);
    await context.close();
  });

  it('lets a viewer see everything and change nothing, and says why', async () => {
    const { context, page } = await open({}, `#token=${token.viewer}`);
    await welcomed(page);
    await page.waitForSelector('.spoken button[data-changes]:not([hidden])');
    expect(await page.textContent('.signedIn')).toContain('a viewer: you see everything and change nothing.');
    const asked: string[] = [];
    page.on('request', (request) => {
      if (request.method() !== 'GET') asked.push(`${request.method()} ${request.url()}`);
    });
    const shelve = page.locator('.spoken button[data-changes]:visible').first();
    expect(await shelve.getAttribute('aria-disabled')).toBe('true');
    await shelve.focus();
    await page.keyboard.press('Enter');
    await page.waitForSelector('.signedIn strong:not([hidden])');
    expect(await page.textContent('.signedIn strong')).toContain('A viewer may look');
    expect(await page.locator('dialog[open]').count()).toBe(0);
    await picture(page, 'viewer');
    await page.goto(`${address}/#/logbook`);
    await page.fill('.noteForm .noteText input', 'a viewer writes');
    await page.keyboard.press('Enter');
    await page.waitForTimeout(300);
    await picture(page, 'viewer-logbook');
    await page.goto(`${address}/#/rehearse`);
    await page.waitForTimeout(700);
    await picture(page, 'viewer-rehearse');
    expect(asked.filter((each) => !/preview|proposal/.test(each))).toEqual([]);
    await context.close();
  });

  it('asks again once the token is withdrawn, and after signing out', async () => {
    const name = 'for a while';
    const passing = createToken(data.path, { name, role: 'viewer', channels: null }, new Date());
    const { context, page } = await open({ dark: true, width: 480 }, `#token=${passing}`);
    await welcomed(page);
    withdrawToken(data.path, name);
    expect(readTokens(data.path).map((each) => each.name)).not.toContain(name);
    await page.waitForSelector('.signIn', { timeout: 20_000 });
    await picture(page, 'sign-in-dark-narrow');
    await page.fill('.signIn input', token.viewer);
    await page.keyboard.press('Enter');
    await welcomed(page);
    await picture(page, 'viewer-dark-narrow');
    await page.click('.signedIn button');
    await page.waitForSelector('.signIn');
    expect(await context.cookies()).toEqual([]);
    await context.close();
  });
});
