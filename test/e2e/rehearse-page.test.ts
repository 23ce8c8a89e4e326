import { readFile } from 'node:fs/promises';
import type { Browser, Page } from 'playwright-core';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import type { ChannelState } from '../../shared-types/channel.ts';
import type { Mark, RehearsalState } from '../../shared-types/rehearsal.ts';
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

/** What follows the hand must have followed within this time (ms), drawing included. */
const FOLLOWED = 50;

describe.runIf(findChromium() !== null)('the Rehearse page of the demo, in a browser', () => {
  const folder = dataFolder();
  let server: Built;
  let browser: Browser;
  let page: Page;
  let complaints: string[];

  beforeAll(async () => {
    server = await startBuilt(['--demo', '--port', '0', '--data', folder.path]);
    browser = await openBrowser();
    page = await browser.newPage({ viewport: { width: 1440, height: 1000 }, acceptDownloads: true });
    complaints = complaintsOf(page);
    await page.goto(`http://127.0.0.1:${server.port}/`);
    await page.getByRole('link', { name: 'Rehearse' }).click();
    await page.locator('[data-loaded]').waitFor();
  });

  afterAll(async () => {
    await browser?.close();
    await server?.end('SIGTERM');
    folder.remove();
  });

  const rehearse = () => page.getByRole('button', { name: 'Rehearse', exact: true });
  const answer = () => page.locator('.answer');
  const row = async () => Number(await answer().getAttribute('data-row'));
  const figures = () => page.locator('.scoreTable').textContent();

  it('has the training recording of the loop, and asks for what is missing', async () => {
    await page.getByLabel('Channel', { exact: true }).first().selectOption('Loop B');
    expect(await page.locator('.recordingList').textContent()).toMatch(/6 h \d+ min, 5\d.\d{3} samples/);
    await rehearse().click();
    expect(await page.locator('.go').textContent()).toContain('missing or wrong');
    const invalid = await page.locator('.asks [aria-invalid]').count();
    expect(invalid).toBeGreaterThanOrEqual(3);
  });

  it('proposes a rule, and applies it only when asked to', async () => {
    const start = page.getByRole('button', { name: /^Start from sides:/ });
    await start.waitFor();
    expect(await page.getByLabel('The same as text').inputValue()).toBe('');
    await start.click();
    expect(await page.getByLabel('The same as text').inputValue()).toMatch(/^sides:-/);
    await page.locator('.ruleFound', { hasText: /\d+ reversals, [\d.]+ an hour/ }).waitFor();
  });

  it('says a wrong rule in words and draws the switches of a right one while it is typed', async () => {
    const rule = page.getByLabel('The same as text');
    await rule.fill('sides:0.3,-0.3');
    await page.locator('.ruleField .fieldFault', { hasText: /low|LOW|below/ }).waitFor();
    await rule.fill('sides:90,99');
    await page.locator('.ruleFound', { hasText: 'No ' }).waitFor();
    await rule.fill('sides:-0.3,0.3');
    await page.locator('.ruleFound', { hasText: /6\d\d reversals/ }).waitFor();
  });

  it('refuses a least lead beyond the horizon beside the field', async () => {
    await page.getByLabel('Least useful lead').fill('30');
    await page.getByLabel('Horizon').fill('20');
    await rehearse().click();
    expect(await page.locator('.asks .rehearseField .fieldFault:visible').allTextContents()).toEqual(
      expect.arrayContaining([expect.stringMatching(/horizon/i)]),
    );
    expect(await getJson<RehearsalState[]>(server.port, '/api/rehearsals')).toEqual([]);
  });

  it('offers the delay that was measured for the channel, to be charged to every lead', async () => {
    const [watch] = (await getJson<WatchState[]>(server.port, '/api/watches')).filter(
      ({ channels }) => channels[0] === 'Loop B',
    );
    const trial = await fetch(`http://127.0.0.1:${server.port}/api/watches/${watch!.watch}/trials`, {
      method: 'POST',
      headers: { 'content-type': 'application/json' },
      body: '{}',
    });
    expect(trial.status).toBe(200);
    await page.reload();
    await page.locator('[data-loaded]').waitFor();
    await page.locator('.more summary').click();
    await page.getByRole('button', { name: /^Charge the [\d.]+ s that were measured/ }).click();
    const delay = page.getByLabel('Delivery takes');
    expect(Number(await delay.inputValue())).toBeGreaterThan(0);
    await delay.fill('0');
  });

  it('leaves a stretch out that is drawn over, and takes it back', async () => {
    const paper = page.locator('.formSignal .rollPaper');
    const box = (await paper.boundingBox())!;
    await page.mouse.move(box.x + 200, box.y + 60);
    await page.mouse.down();
    await page.mouse.move(box.x + 320, box.y + 60, { steps: 5 });
    await page.mouse.up();
    await page.locator('.stretchBar').getByRole('button', { name: /leave/i }).click();
    const form = page.locator('.smallForm:visible').first();
    await form.waitFor();
    await form.getByRole('button').first().click();
    const marks = await until(
      'the stretch is stored',
      async () => {
        const found = await getJson<Mark[]>(server.port, '/api/marks?channel=Loop%20B');
        return found.length === 1 && found;
      },
      5,
    );
    expect(marks[0]!.to! - marks[0]!.from).toBeGreaterThan(300);
    await page.locator('.leftOutList li').getByRole('button').first().click();
    await until(
      'it is taken back',
      async () => (await getJson<Mark[]>(server.port, '/api/marks?channel=Loop%20B')).length === 0,
      5,
    );
  });

  it('shows progress, can be stopped, and shows nothing of what was half done', async () => {
    await page.getByLabel('Least useful lead').fill('10');
    await page.getByLabel('Horizon').fill('20');
    await rehearse().click();
    await page.locator('.progress').getByRole('button', { name: 'Stop' }).click({ timeout: 5000 });
    await page.locator('.progress', { hasText: 'half done is not shown' }).waitFor();
    expect(await answer().count()).toBe(0);
  });

  it('answers with a sentence, a verdict, the curve, leads, the map, the whole recording', async () => {
    await page.getByLabel('False warnings, at most').fill('4');
    await rehearse().click();
    await answer().waitFor({ timeout: 30_000 });
    expect(await page.locator('.answerSentence').textContent()).toMatch(
      /warned \d+ of \d+ reversals, 95 % interval \d+ to \d+ %, median lead [\d.]+ s/,
    );
    expect(await page.locator('.verdict').getAttribute('data-kind')).toMatch(
      /^(useful|weak|no better than|no skill)$/,
    );
    expect(await page.locator('.tradeOff path.trade').count()).toBeGreaterThan(5);
    const bars = await page
      .locator('.leadBar')
      .evaluateAll((all) => all.map((bar) => Number(bar.getAttribute('height'))));
    expect(bars.some((height) => height > 20)).toBe(true);
    expect(await page.locator('.map td[data-chosen]').count()).toBe(1);
    expect(await page.locator('.contenders tbody tr').count()).toBeGreaterThan(8);
    const painted = await page
      .locator('.wholeStrip canvas')
      .first()
      .evaluate((canvas: HTMLCanvasElement) => {
        const { data } = canvas.getContext('2d')!.getImageData(0, 0, canvas.width, canvas.height);
        let count = 0;
        for (let i = 3; i < data.length; i += 4) if (data[i]! > 0) count++;
        return count / (data.length / 4);
      });
    expect(painted).toBeGreaterThan(0.02);
  });

  it('lets the threshold be dragged: every figure, the leads and the strip follow at once', async () => {
    const before = { row: await row(), figures: await figures() };
    const curve = page.locator('.tradeOff');
    await curve.scrollIntoViewIfNeeded();
    const point = (await page.locator('.handPoint circle').nth(1).boundingBox())!;
    const outcomes = () => page.locator('.laneName').allTextContents();
    const lanes = await outcomes();
    await page.mouse.move(point.x + point.width / 2, point.y + point.height / 2);
    await page.mouse.down();
    const took: number[] = [];
    for (let i = 1; i <= 20; i++) {
      await page.mouse.move(point.x + 8 * i, point.y + 4 * i);
      await page.evaluate(() => new Promise((resolve) => requestAnimationFrame(resolve)));
      took.push(Number(await answer().getAttribute('data-followed')));
    }
    await page.mouse.up();
    expect(await row()).not.toBe(before.row);
    expect(await figures()).not.toBe(before.figures);
    expect(await outcomes()).not.toEqual(lanes);
    expect(Math.max(...took)).toBeLessThan(FOLLOWED);
    expect(await page.locator('.figuresHost').textContent()).toContain('Moved by hand');
  });

  it('moves the threshold by the keyboard, and back to the chosen one', async () => {
    const at = await row();
    await page.locator('.tradeOff').focus();
    await page.keyboard.press('ArrowLeft');
    await until('one row stricter', async () => (await row()) === at + 1, 2);
    await page.getByRole('button', { name: 'The chosen one' }).click();
    await until(
      'as chosen',
      async () => /As chosen/.test((await page.locator('.figuresHost').textContent())!),
      2,
    );
  });

  it('opens the card of a switch, with what would have caught it', async () => {
    const strip = page.locator('.wholeStrip .rollPaper');
    await strip.focus();
    await page.keyboard.press('ArrowRight');
    await page.keyboard.press('Enter');
    const card = page.locator('.cardPlace .card');
    await card.waitFor();
    expect(await card.textContent()).toMatch(/reversal/i);
    await page.getByRole('button', { name: /after →/ }).click();
    await card.waitFor();
  });

  it('gives the report as one file without links outwards, and the figures as JSON', async () => {
    const address = await page.getByRole('link', { name: 'Report' }).getAttribute('href');
    const report = await (await fetch(`http://127.0.0.1:${server.port}${address}`)).text();
    expect(report).toContain('not a safety function');
    expect(report).not.toMatch(/(src|href)="(?!#)/);
    const downloading = page.waitForEvent('download');
    await page.getByRole('link', { name: 'Figures as JSON' }).click();
    const file = await (await downloading).path();
    const json = JSON.parse(await readFile(file, 'utf8'));
    expect(json.score.detection.value).toBeGreaterThan(0.5);
    expect(json.verdict.kind).toBe(await page.locator('.verdict').getAttribute('data-kind'));
  });

  it('is put into use: the watch before it goes, the new one has the promise of this rehearsal', async () => {
    await page.getByRole('button', { name: 'Watch with these settings' }).click();
    await page.locator('.actionSaid', { hasText: 'is watched from now on' }).waitFor();
    const watches = await getJson<WatchState[]>(server.port, '/api/watches');
    const own = watches.filter(({ channels }) => channels[0] === 'Loop B');
    expect(own.map(({ use }) => use).sort()).toEqual(['in use', 'taken out of use']);
    const used = own.find(({ use }) => use === 'in use')!;
    expect(used.promise!.detection.value).toBeGreaterThan(0.5);
  });

  it('plays the recording as live through the real ingest, watched', async () => {
    await page.getByRole('button', { name: 'Play as live…' }).click();
    await page.locator('.playForm').getByLabel('Pace').selectOption('100');
    await page.locator('.playForm').getByRole('button', { name: 'Play', exact: true }).click();
    await page.locator('.actionSaid', { hasText: 'Playing as' }).waitFor();
    await until(
      'samples come on the played channel',
      async () => {
        const channels = await getJson<ChannelState[]>(server.port, '/api/channels');
        return channels.find(({ channel }) => channel === 'Loop B, played')?.samples;
      },
      10,
    );
    await until(
      'it is watched',
      async () =>
        (await getJson<WatchState[]>(server.port, '/api/watches')).some(
          ({ channels, use }) => channels[0] === 'Loop B, played' && use !== 'taken out of use',
        ),
      10,
    );
    await page.getByRole('button', { name: 'Stop playing' }).click();
    await page.locator('.actionSaid', { hasText: 'was stopped' }).waitFor();
  });

  it('has its rehearsals listed, opens one again by its address, and fits a phone', async () => {
    expect(await page.locator('.earlierList li').count()).toBe(2);
    const address = page.url();
    await page.goto('about:blank');
    await page.goto(address);
    await answer().waitFor();
    await page.setViewportSize({ width: 360, height: 740 });
    await expect
      .poll(() => page.evaluate(() => document.documentElement.scrollWidth))
      .toBeLessThanOrEqual(360);
    await page.setViewportSize({ width: 1440, height: 1000 });
    // the browser itself notes the refusal of the rule that was wrong, and nothing else
    expect(complaints).toEqual([expect.stringContaining('status of 400 (Bad Request)')]);
  });
});
