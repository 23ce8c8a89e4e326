import { mkdirSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import type { Browser, Page } from 'playwright-core';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import type { Delivery, MeasuredDelay } from '../../shared-types/delivery.ts';
import type { LogEntry } from '../../shared-types/warning.ts';
import { receiver } from '../server/gateway/delivery/receiver.ts';
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

describe.runIf(findChromium() !== null)('Measure my delay, in a browser with the demo', () => {
  const folder = dataFolder();
  let server: Built;
  let browser: Browser;
  let page: Page;
  let complaints: string[];
  let port = 0;

  beforeAll(async () => {
    // the receiver of each test comes up on this address
    const first = await receiver();
    port = first.port;
    await first.close();
    mkdirSync(folder.path, { recursive: true });
    writeFileSync(
      join(folder.path, 'settings.json'),
      JSON.stringify({
        receivers: [{ name: 'bench lamp', url: `http://127.0.0.1:${port}/`, secretVariable: 'LAMP' }],
      }),
    );
    process.env.LAMP = 'a secret of more than sixteen bytes';
    server = await startBuilt(['--demo', '--port', '0', '--data', folder.path]);
    browser = await openBrowser();
    page = await browser.newPage({ viewport: { width: 1440, height: 900 } });
    complaints = complaintsOf(page);
    await page.goto(`http://127.0.0.1:${server.port}/`);
    await page.getByRole('heading', { name: 'Loop A' }).waitFor();
  });

  afterAll(async () => {
    delete process.env.LAMP;
    await browser?.close();
    await server?.end('SIGTERM');
    folder.remove();
  });

  const dialog = () => page.locator('dialog[open]');
  const measured = () => getJson<MeasuredDelay | null>(server.port, '/api/watches/loop-a/delay');

  it('sends a trial by one key through producer, server, page, tone and webhook, and shows where the time went', async () => {
    const lamp = await receiver((response) => {
      setTimeout(() => response.writeHead(204).end(), 50);
    }, port);
    await page.getByRole('button', { name: 'Tone off' }).click();
    await page.locator('section[aria-label="Loop A"]').focus();
    await page.keyboard.press('d');
    await page.getByText('A trial of Loop A, no warning').waitFor({ timeout: 8000 });
    await dialog()
      .getByText(/A warning reaches you .* for you\./)
      .waitFor({ timeout: 12_000 });
    const delay = (await measured())!;
    expect(delay).toMatchObject({ watch: 'loop-a', answered: true, leastLead: 10 });
    expect(delay.rig.how).toBe('measured');
    // the demo's rig sends every 0.15 to 0.35 s, and keeps samples no longer
    expect(delay.rig.seconds!).toBeLessThan(1);
    expect(delay.page.how).toBe('measured');
    expect(delay.page.seconds!).toBeGreaterThan(0);
    expect(delay.page.seconds!).toBeLessThan(2);
    expect(delay.tone.how).toBe('measured');
    expect(delay.tone.seconds!).toBeGreaterThan(0.02);
    expect(delay.webhooks).toMatchObject([{ receiver: 'bench lamp', how: 'measured' }]);
    expect(delay.webhooks[0]!.seconds!).toBeGreaterThan(0.05);
    expect(delay.total + delay.left!).toBeCloseTo(10, 9);
    const trial = lamp.came.find(
      ({ body }) => (JSON.parse(body) as { type: string }).type === 'foreshift.trial',
    )!;
    expect(trial.headers.signature).toMatch(/^warning=:/);
    // what the page shows is what was measured
    const rows = await dialog().locator('.delayTable th').allTextContents();
    expect(rows).toEqual([
      'Rig',
      'Network',
      'Program',
      'Delivery',
      'page',
      'tone',
      'webhook bench lamp',
      'Together',
      'Left for you',
    ]);
    expect(await dialog().locator('code').textContent()).toBe(
      `--delay ${Math.ceil(10 * delay.total - 1e-9) / 10}`,
    );
    // what is drawn as the rig's share is its share
    const shares = await dialog()
      .locator('.delayOf.rig')
      .evaluateAll((all) => all.map((each) => Number(each.getAttribute('width'))));
    expect(shares.at(-1)! / 556).toBeCloseTo(delay.rig.seconds! / delay.total, 2);
  }, 60_000);

  it('measures again, and is a trial in the log and in the outbox, of no warning', async () => {
    await receiver(undefined, port);
    const before = (await measured())!;
    await dialog().getByRole('button', { name: 'Measure again' }).click();
    await until('another trial', async () => (await measured())!.trial !== before.trial, 15);
    await dialog().getByRole('button', { name: 'Close' }).click();
    const said = await getJson<LogEntry[]>(server.port, '/api/log');
    expect(said.filter(({ text }) => text.startsWith('trial: ')).length).toBe(2);
    const trials = (await getJson<Delivery[]>(server.port, '/api/deliveries')).filter(
      ({ kind }) => kind === 'trial',
    );
    expect(trials.map(({ warning }) => warning)).toEqual([0, 0]);
  }, 40_000);

  it('is offered on the strip while nothing waits for a person, with what was measured', async () => {
    const strip = page.locator('section[aria-label="Loop A"]');
    await until(
      'no warning waits',
      async () => {
        const acknowledge = strip.getByRole('button', { name: 'Acknowledge' });
        if (await acknowledge.isVisible()) await acknowledge.click({ timeout: 1000 }).catch(() => undefined);
        return await strip.getByRole('button', { name: 'Measure my delay' }).isVisible();
      },
      60,
    );
    // out of service no warning is spoken of, and what was measured stands in its place
    const response = await fetch(`http://127.0.0.1:${server.port}/api/watches/loop-a/actions`, {
      method: 'POST',
      headers: { 'content-type': 'application/json' },
      body: JSON.stringify({ action: 'take out of service', reason: 'to look' }),
    });
    expect(response.status).toBe(200);
    await strip.getByText(/reaches you .* late, measured at \d\d:\d\d/).waitFor({ timeout: 10_000 });
    expect(complaints).toEqual([]);
  }, 130_000);
});
