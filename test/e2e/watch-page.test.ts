import type { Browser, Page } from 'playwright-core';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import type { Warning } from '../../shared-types/warning.ts';
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

/** Share of the pixel columns of a strip's signal panel that carry ink, over the newest `seconds` of three minutes. */
function inkedShare(page: Page, strip: string, seconds: number): Promise<number> {
  return page.evaluate(
    ([name, newest]) => {
      const root = document.querySelector(`section[aria-label="${name}"]`)!;
      const over = root.querySelector<HTMLElement>('.u-over')!;
      const canvas = root.querySelector('canvas')!;
      const ratio = canvas.width / canvas.getBoundingClientRect().width;
      const left = over.offsetLeft * ratio;
      const width = over.offsetWidth * ratio;
      const from = Math.round(left + width * (1 - (newest as number) / 180));
      const span = Math.round(left + width) - from - 2;
      const top = over.offsetTop * ratio + 1;
      const height = over.offsetHeight * ratio - 2;
      // read off a copy: reading from the page's own canvas would change how the browser keeps it
      const copy = new OffscreenCanvas(span, height).getContext('2d', { willReadFrequently: true })!;
      copy.drawImage(canvas, from, top, span, height, 0, 0, span, height);
      const image = copy.getImageData(0, 0, span, height);
      let inked = 0;
      for (let x = 0; x < image.width; x++) {
        for (let y = 0; y < image.height; y++) {
          const at = 4 * (y * image.width + x);
          const dark =
            image.data[at + 3]! > 150 && image.data[at]! + image.data[at + 1]! + image.data[at + 2]! < 300;
          if (!dark) continue;
          inked++;
          break;
        }
      }
      return inked / image.width;
    },
    [strip, seconds] as const,
  );
}

const warnings = (port: number) => getJson<Warning[]>(port, '/api/warnings');
const watches = (port: number) => getJson<WatchState[]>(port, '/api/watches');

describe.runIf(findChromium() !== null)('the Watch page of the demo, in a browser', () => {
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
    await page.getByRole('heading', { name: 'Loop A' }).waitFor();
  });

  afterAll(async () => {
    await browser?.close();
    await server?.end('SIGTERM');
    folder.remove();
  });

  it('draws live strips with ink over their whole length, and says the caution', async () => {
    await until('ink', async () => (await inkedShare(page, 'Loop A', 150)) > 0.95, 30);
    expect(await inkedShare(page, 'Loop B', 150)).toBeGreaterThan(0.95);
    expect(await inkedShare(page, 'Room humidity', 150)).toBeGreaterThan(0.9);
    const before = await page.locator('section[aria-label="Loop A"] .number').textContent();
    await until(
      'a new value',
      async () => (await page.locator('section[aria-label="Loop A"] .number').textContent()) !== before,
      10,
    );
    expect(await page.locator('body').textContent()).toMatch(/not a safety function/);
  });

  it('shows a warning before its reversal, takes the acknowledgement, and marks it later as come true', async () => {
    const old = Math.max(0, ...(await warnings(server.port)).map(({ id }) => id));
    const cameTrue = await until(
      'a warning issued while the page was open that comes true',
      async () => {
        const live = (await warnings(server.port)).filter(({ id, quiet }) => id > old && !quiet);
        const open = live.find(({ outcome }) => outcome === 'open');
        if (open !== undefined && open.acknowledgedAt === null) await acknowledgeOnPage(open);
        return live.find(({ outcome, acknowledgedAt }) => outcome === 'true' && acknowledgedAt !== null);
      },
      160,
    );
    expect(cameTrue.switchAt!).toBeGreaterThan(cameTrue.at + 10 - 0.5);
    expect(cameTrue.madeAt).toBeLessThan(cameTrue.from);
    expect(cameTrue.deliveredAt! - cameTrue.madeAt).toBeLessThan(1);
    await until(
      'the page says so',
      async () => /came true/.test((await page.locator('.grades').textContent()) ?? ''),
      5,
    );
  }, 180_000);

  /** Reads the open warning off its strip and presses the button there. */
  async function acknowledgeOnPage(warning: Warning): Promise<void> {
    const strip = page.locator(`section[aria-label="${warning.channels[0]}"]`);
    await strip
      .getByText(/Reversal (expected|may happen)/)
      .first()
      .waitFor({ timeout: 5000 });
    expect(await strip.locator('.span').count()).toBeGreaterThan(0);
    const button = strip.getByRole('button', { name: 'Acknowledge' });
    // the reversal may come between the look and the press, and an older warning may be what is acknowledged
    await button.click({ timeout: 2000 }).catch(() => undefined);
    const [now] = (await watches(server.port)).filter(({ watch }) => watch === warning.watch);
    await until(
      'acknowledged',
      async () => (await warnings(server.port)).find(({ id }) => id === warning.id)!.acknowledgedAt !== null,
      5,
      // then it is pressed again: what is asserted is that it was acknowledged in the end
    ).catch(() => undefined);
    expect(now!.name).toBe(warning.channels[0]);
  }

  it('shelves a watch with an end and a reason, and takes it back', async () => {
    const strip = page.locator('section[aria-label="Loop B"]');
    await strip.getByRole('button', { name: 'Shelve…' }).click();
    const dialog = page.locator('dialog[open]');
    await dialog.waitFor();
    await dialog.getByLabel('Why').fill('trimming the heater');
    await dialog.getByRole('button', { name: /^Shelve/ }).click();
    await strip.locator('.badge', { hasText: 'shelved' }).waitFor({ timeout: 5000 });
    const shelved = (await watches(server.port)).find(({ name }) => name === 'Loop B')!;
    expect(shelved.state).toBe('shelved');
    expect(shelved.reason).toBe('trimming the heater');
    await strip.getByRole('button', { name: 'Unshelve' }).click();
    await until(
      'off the shelf',
      async () => (await watches(server.port)).every(({ state }) => state !== 'shelved'),
      5,
    );
  });

  it('says at once that a killed server is gone, and fills the hole when it is back', async () => {
    expect(complaints).toEqual([]);
    const { port } = server;
    const killedAt = Date.now() / 1000;
    await server.end('SIGKILL');
    await page.locator('.notice.lost').waitFor({ timeout: 4000 });
    expect(await page.locator('.notice.lost').textContent()).toMatch(/has not answered|does not answer|old/);
    await new Promise((resolve) => setTimeout(resolve, 3000));
    server = await startBuilt(['--demo', '--port', String(port), '--data', folder.path]);
    await page.locator('.notice.lost').waitFor({ state: 'hidden', timeout: 20_000 });
    await until(
      'samples from before, during and after the hole',
      async () => {
        const query = `from=${killedAt - 10}&to=${killedAt + 20}&columns=2000`;
        const { t } = await getJson<{ t: number[] }>(port, `/api/channels/Loop%20A/columns?${query}`);
        const steps = t.slice(1).map((time, i) => time - t[i]!);
        return t.length > 0 && t[0]! < killedAt - 8 && t.at(-1)! > killedAt + 10 && Math.max(...steps) < 1.7;
      },
      40,
    );
    await until('ink over the hole', async () => (await inkedShare(page, 'Loop A', 60)) > 0.95, 10);
    // what the browser itself says of a refused connection is not the page's
    const own = complaints.filter(
      (text) => !/ERR_CONNECTION_REFUSED|WebSocket connection to .* failed/.test(text),
    );
    expect(own).toEqual([]);
    expect((await getJson<{ holes: number }[]>(port, '/api/channels')).map(({ holes }) => holes)).toEqual([
      0, 0, 0,
    ]);
  }, 120_000);
});

describe.runIf(findChromium() !== null)('the Watch page of an empty server, in a browser', () => {
  it('says how to connect a channel, with the address, and complains of nothing', async () => {
    const folder = dataFolder();
    const server = await startBuilt(['--port', '0', '--data', folder.path]);
    const browser = await openBrowser();
    try {
      const page = await browser.newPage();
      const complaints = complaintsOf(page);
      await page.goto(`http://127.0.0.1:${server.port}/`);
      const first = page.locator('.firstVisit');
      await first.getByText(`ws://127.0.0.1:${server.port}/ingest`).first().waitFor();
      expect(await first.textContent()).toMatch(/npm start/);
      expect(await page.locator('body').textContent()).toMatch(/not a safety function/);
      expect(complaints).toEqual([]);
    } finally {
      await browser.close();
      expect(await server.end('SIGTERM')).toBe(0);
      folder.remove();
    }
  });
});
