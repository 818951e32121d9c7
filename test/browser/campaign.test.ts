import { readFile } from 'node:fs/promises';
import { join } from 'node:path';
import type { Browser, Page } from 'playwright-core';
import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import { buildDemoCampaign } from '../../jobs/simulate/index.ts';
import { FORECAST_CAUTION } from '../../schema/wire/forecasts.ts';
import { RESULT_TABLES } from '../../schema/wire/result-tables.ts';
import { findChromium, openBrowser, openPage } from './open-browser.ts';
import { serveCampaigns, type TestServer, writeFiles } from './serve-campaigns.ts';

const executable = findChromium();
if (!executable) console.log('browser tests skipped: no Chromium on the PATH');

// The truth is that of the synthetic campaign: what went into the files comes back on the page. The tests run in order
// and share the page, as one person would use it.
describe.skipIf(!executable)('a campaign on the page', () => {
  const demo = buildDemoCampaign();
  const scanFiles = demo.files.filter(({ path }) => path.startsWith('synthetic-'));
  const troubles: string[] = [];
  let server: TestServer;
  let browser: Browser;
  let page: Page;

  beforeAll(async () => {
    server = await serveCampaigns();
    await writeFiles(join(server.folder, 'campaign'), demo.files);
    browser = await openBrowser(executable as string);
    page = await openPage(browser, { viewport: { width: 1280, height: 900 } });
    page.on('console', (message) => {
      if (message.type() === 'error' || message.type() === 'warning') troubles.push(message.text());
    });
    page.on('pageerror', (error) => troubles.push(error.message));
  });

  afterAll(async () => {
    await browser?.close();
    await server?.stop();
  });

  test('is made and asks for files', async () => {
    await page.goto(server.url);
    await page.getByText('No campaign yet').waitFor();
    await page.getByLabel('New campaign').click();
    await page.keyboard.type('Synthetic demo');
    await page.getByRole('button', { name: 'Create' }).click();
    await page.getByRole('heading', { level: 1, name: 'Synthetic demo' }).waitFor();
    await page.getByText('Drop the campaign folder here').waitFor();
  });

  test('takes a folder, says what became of each file, and follows the work to its end', async () => {
    const chooser = page.waitForEvent('filechooser');
    await page.getByRole('button', { name: 'Choose folder' }).click();
    await (await chooser).setFiles(join(server.folder, 'campaign'));
    await page
      .getByText(
        `${demo.files.length} files: ${demo.files.length - scanFiles.length} sheet, ${scanFiles.length} accepted`,
      )
      .waitFor();
    expect(await page.locator('.outcome-list .file').allTextContents()).toEqual(
      expect.arrayContaining(demo.files.map(({ path }) => path)),
    );
    // Nothing is reloaded here: the words change because the server sends the changes.
    await page.getByText('nothing left to run').waitFor();
    await page.getByText('3 of 3 samples fitted', { exact: false }).waitFor();
  });

  test('shows every scan on the coverage map with its instrument, rate and state', async () => {
    // The tables follow the status by a second or two.
    await expect.poll(() => page.getByRole('option', { name: /waiting/ }).count()).toBe(0);
    await page.locator('.readout-summary', { hasText: `${scanFiles.length} scans` }).waitFor();
    const samples = [...new Set(scanFiles.map(({ path }) => path.split('/')[0]))];
    const names = new Map<string, string[]>();
    for (const sample of samples) {
      const marks = page.getByRole('listbox', { name: `Scans of ${sample}` }).getByRole('option');
      names.set(sample, await marks.evaluateAll((all) => all.map((mark) => mark.getAttribute('aria-label') ?? '')));
    }
    for (const [sample, marks] of names) {
      const own = scanFiles.filter(({ path }) => path.startsWith(`${sample}/`));
      expect(marks).toHaveLength(own.length);
      for (const instrument of new Set(own.map(({ path }) => path.split('/')[1]))) {
        const wanted = own.filter(({ path }) => path.split('/')[1] === instrument).length;
        expect(marks.filter((mark) => mark.startsWith(`${instrument}, `))).toHaveLength(wanted);
      }
      for (const mark of marks)
        expect(mark).toMatch(/, [\d.\u202f]+\u00a0K\/min, (reduced, peak -?[\d.]+\u00a0°C|set aside)/);
    }
    const damaged = demo.flaws.filter(({ code }) => code === 'file-damaged');
    expect([...names.values()].flat().filter((mark) => mark.includes('set aside'))).toHaveLength(damaged.length);
  });

  test('shows the gap and every planted flaw with what to do', async () => {
    const steps = page.getByRole('region', { name: 'What to do next' });
    // The tables follow the status by a moment.
    for (const { code, sample, file } of demo.flaws) {
      if (code === 'decade-gap') {
        const entry = page.getByRole('listitem').filter({ has: page.getByRole('heading', { name: sample }) });
        await entry.locator('.empty-decade').waitFor({ state: 'attached' });
        expect(await entry.locator('.empty-decade').count()).toBe(1);
        expect(await entry.textContent()).toContain('empty decade');
      } else {
        await steps
          .getByText(file ?? sample)
          .first()
          .waitFor({ state: 'attached' });
      }
    }
  });

  test('gives the energies that went in, within 2 %', async () => {
    for (const { sample, energyKJPerMol } of demo.truth) {
      if (energyKJPerMol === undefined) continue;
      const entry = page.getByRole('listitem').filter({ has: page.getByRole('heading', { name: sample }) });
      const shown = (await entry.locator('.entry-number .number').first().textContent()) ?? '';
      expect(shown).toMatch(/^[\d.]+ ±\u00a0[\d.]+ kJ\/mol$/);
      expect(Math.abs(Number.parseFloat(shown) / energyKJPerMol - 1), `${sample}: ${shown}`).toBeLessThan(0.02);
    }
  });

  test('is read by arrow keys: the active scan is named and described', async () => {
    const strip = page.getByRole('listbox').first();
    await strip.focus();
    const active = () => strip.getAttribute('aria-activedescendant');
    const first = await active();
    await page.keyboard.press('ArrowRight');
    const second = await active();
    expect(second).not.toBe(first);
    expect(await page.locator(`#${second}`).getAttribute('role')).toBe('option');
    const file = (await page.locator('.readout .file').textContent())?.split(',')[0];
    expect(scanFiles.map(({ path }) => path)).toContain(file);
    await page.keyboard.press('ArrowDown');
    expect(await page.evaluate(() => document.activeElement?.id)).toBe('strip-1');
  });

  test('remembers the units', async () => {
    await page.getByRole('group', { name: 'Unit of heating rate' }).getByLabel('K/s').check();
    await page.getByRole('group', { name: 'Unit of temperature' }).getByLabel('K', { exact: true }).check();
    await page.reload();
    const name = await page.getByRole('option').first().getAttribute('aria-label');
    expect(name).toMatch(/\u00a0K\/s, reduced, peak [\d.]+\u00a0K/);
    expect(await page.locator('.axis-title').textContent()).toContain('K/s');
  });

  test('takes a dropped file; the same bytes again are known', async () => {
    const { path, bytes } = scanFiles[0];
    const dropped = await page.evaluateHandle(
      ([name, numbers]) => {
        const transfer = new DataTransfer();
        transfer.items.add(new File([new Uint8Array(numbers as number[])], name as string));
        return transfer;
      },
      [path.split('/').at(-1), [...bytes]] as const,
    );
    for (const type of ['dragenter', 'dragover', 'drop'])
      await page.dispatchEvent('main', type, { dataTransfer: dropped });
    await page.getByText('already here, the same bytes').waitFor();
  });

  test('saves a table', async () => {
    const download = page.waitForEvent('download');
    await page.getByRole('button', { name: 'parameters.csv' }).click();
    const saved = await download;
    expect(saved.suggestedFilename()).toBe('Synthetic-demo-parameters.csv');
    const [header, ...rows] = (await readFile(await saved.path(), 'utf8')).trim().split('\n');
    expect(header).toBe(RESULT_TABLES.parameters.join(','));
    expect(rows.length).toBeGreaterThan(100);
  });

  test('saves the report and all results', async () => {
    for (const [name, start] of [
      ['report.html', '<!DOCTYPE html>'],
      ['results.zip', 'PK'],
    ]) {
      const download = page.waitForEvent('download');
      await page.getByRole('button', { name: `Save ${name}` }).click();
      const saved = await download;
      expect(saved.suggestedFilename()).toBe(`Synthetic-demo-${name}`);
      expect((await readFile(await saved.path(), 'latin1')).slice(0, start.length)).toBe(start);
    }
  });

  test('copies a table, cells parted by tabs', async () => {
    await page.context().grantPermissions(['clipboard-read', 'clipboard-write']);
    await page.getByRole('button', { name: 'Copy instruments' }).click();
    await page.getByText('instruments copied').waitFor();
    const [head] = (await page.evaluate(() => navigator.clipboard.readText())).split('\n');
    expect(head).toBe(RESULT_TABLES.instruments.join('\t'));
  });

  test('shows a sample: a lane and a row a scan, a curve and a peak each, six methods', async () => {
    await page.getByRole('link', { name: 'synthetic-film' }).first().click();
    await page.getByRole('heading', { level: 1, name: 'synthetic-film' }).waitFor();
    await page.locator('.lane').first().waitFor();
    expect(page.url()).toMatch(/\/samples\/synthetic-film$/);
    const scans = scanFiles.filter(({ path }) => path.startsWith('synthetic-film/')).length;
    const figure = (name: string) =>
      page.getByRole('figure').filter({ has: page.getByRole('heading', { name, exact: true }) });
    expect(await figure('Thermograms').locator('.lane').count()).toBe(scans);
    // What stands further down comes after the thermograms, and is drawn when it comes near.
    await figure('Conversion').locator('.curve').first().waitFor();
    expect(await figure('Conversion').locator('.curve').count()).toBe(scans);
    await figure('Kissinger plot').scrollIntoViewIfNeeded();
    await figure('Kissinger plot').locator('.mark').nth(2).waitFor();
    // Each peak as measured and without lag; two instruments and two looks in the legend.
    await expect.poll(() => figure('Kissinger plot').locator('.mark').count()).toBe(2 * scans + 4);
    await expect.poll(() => figure('Activation energy over conversion').locator('.curve-front').count()).toBe(6);
    await expect.poll(() => page.getByRole('region', { name: 'Scans' }).getByRole('row').count()).toBe(scans + 1);
  });

  test('a scan is chosen by pointer and shown by itself', async () => {
    const lanes = page.getByRole('listbox', { name: /^Scans/ });
    await lanes.scrollIntoViewIfNeeded();
    const box = await lanes.boundingBox();
    if (!box) throw new Error('the lanes are not drawn');
    // The lowest lane: the slowest scan.
    await lanes.click({ position: { x: box.width / 2, y: box.height - 60 } });
    const slowest = (await lanes.getByRole('option').first().textContent()) ?? '';
    await page.getByRole('heading', { level: 3, name: slowest, exact: true }).waitFor();
  });

  test('a scan is chosen by keyboard and shown by itself', async () => {
    const lanes = page.getByRole('listbox', { name: /^Scans/ });
    await lanes.focus();
    await page.keyboard.press('End');
    const chosen = page.locator(`#${await lanes.getAttribute('aria-activedescendant')}`);
    const name = (await chosen.textContent()) ?? '';
    expect(name).toContain('chip-north');
    await page.keyboard.press('Enter');
    await page.getByRole('heading', { level: 3, name, exact: true }).waitFor();
    expect(await chosen.getAttribute('aria-selected')).toBe('true');
  });

  test.each(['SVG', 'PNG', 'CSV'])('saves a figure as %s', async (kind) => {
    const download = page.waitForEvent('download');
    await page.getByRole('button', { name: `Save Kissinger plot as ${kind}` }).click();
    const saved = await download;
    expect(saved.suggestedFilename()).toBe(`Synthetic-demo-synthetic-film-Kissinger-plot.${kind.toLowerCase()}`);
    const bytes = await readFile(await saved.path());
    if (kind === 'CSV') {
      expect(bytes.toString().split('\n')[0]).toContain('reciprocal peak temperature [1/K]');
      return;
    }
    // Both are drawn again from the file alone, without the page's style sheets: there is ink on the paper.
    const type = kind === 'SVG' ? 'image/svg+xml' : 'image/png';
    const shares = await page.evaluate(
      async (url) => {
        const image = new Image();
        image.src = url;
        await image.decode();
        const canvas = document.createElement('canvas');
        [canvas.width, canvas.height] = [300, 200];
        const context = canvas.getContext('2d') as CanvasRenderingContext2D;
        context.drawImage(image, 0, 0, 300, 200);
        const { data } = context.getImageData(0, 0, 300, 200);
        let light = 0;
        let inked = 0;
        for (let i = 0; i < data.length; i += 4) {
          const brightness = data[i] + data[i + 1] + data[i + 2];
          if (data[i + 3] > 250 && brightness > 700) light++;
          else if (brightness < 500) inked++;
        }
        return { light: light / 60_000, inked: inked / 60_000 };
      },
      `data:${type};base64,${bytes.toString('base64')}`,
    );
    expect(shares.light).toBeGreaterThan(0.7);
    expect(shares.inked).toBeGreaterThan(0.005);
  });

  const fitted = () => page.locator('.sample-state').filter({ hasText: /^fitted/ });

  test('limits moved by keyboard are taken, the sample is fitted again and the change is on record', async () => {
    const scan = page.locator('.scan-panel');
    const lower = page.getByRole('slider', { name: 'Lower limit of the event' });
    const before = Number(await lower.getAttribute('aria-valuenow'));
    await lower.focus();
    for (let i = 0; i < 3; i++) await page.keyboard.press('Shift+ArrowLeft');
    expect(Number(await lower.getAttribute('aria-valuenow'))).toBeCloseTo(before - 3, 1);
    await scan.getByRole('button', { name: 'Apply' }).press('Enter');
    await scan.getByText('computed again').waitFor();
    await fitted().waitFor();
    await scan.getByText('Limits set by hand').waitFor();
    await scan.getByText('What was corrected before').click();
    await scan.getByText(/limits K: nothing → [\d.]+ to [\d.]+, by hand/).waitFor();
    await expect.poll(async () => Number(await lower.getAttribute('aria-valuenow'))).toBeLessThan(before - 1);
  });

  test('limits are dragged by pointer, and put back', async () => {
    const upper = page.getByRole('slider', { name: 'Upper limit of the event' });
    const before = Number(await upper.getAttribute('aria-valuenow'));
    await upper.scrollIntoViewIfNeeded();
    const box = await upper.boundingBox();
    if (!box) throw new Error('the handle is not drawn');
    await page.mouse.move(box.x + box.width / 2, box.y + 40);
    await page.mouse.down();
    await page.mouse.move(box.x + box.width / 2 + 20, box.y + 40, { steps: 4 });
    await page.mouse.up();
    expect(Number(await upper.getAttribute('aria-valuenow'))).toBeGreaterThan(before + 1);
    await page.getByRole('button', { name: 'Put the limits back' }).click();
    expect(Number(await upper.getAttribute('aria-valuenow'))).toBeCloseTo(before, 2);
  });

  test('a scan is left out with a reason, and taken in again', async () => {
    const scan = page.locator('.scan-panel');
    await scan.getByLabel('Leave this scan out').check();
    await scan.getByLabel('Reason').fill('the membrane broke');
    await scan.getByRole('button', { name: 'Apply' }).click();
    const table = page.getByRole('region', { name: 'Scans' });
    await table.getByText('the membrane broke').waitFor();
    await scan.getByRole('button', { name: 'Take every correction back' }).click();
    await table.getByText('the membrane broke').waitFor({ state: 'detached' });
    await fitted().waitFor();
  });

  test('answers a question about another temperature, with its caution', async () => {
    const forecasts = page.getByRole('region', { name: 'Forecasts' });
    await forecasts.getByLabel('at °C').fill('120');
    await forecasts.getByRole('button', { name: 'Ask' }).click();
    await forecasts
      .locator('form')
      .getByRole('rowheader', { name: /time to α = 0.01 at/ })
      .first()
      .waitFor();
    expect(await forecasts.textContent()).toContain(FORECAST_CAUTION);
  });

  test('an instrument and the jobs have pages of their own', async () => {
    await page.getByRole('navigation', { name: 'Way back' }).getByRole('link', { name: 'Synthetic demo' }).click();
    await page.getByRole('link', { name: 'furnace-west' }).click();
    await page
      .getByRole('figure', { name: '' })
      .getByRole('img', { name: /^Correction from/ })
      .waitFor();
    await page.goBack();
    await page.getByRole('link', { name: 'Jobs' }).click();
    await page.getByText('every job is done').waitFor();
    await page.goBack();
    await page.getByRole('heading', { name: 'What to do next' }).waitFor();
  });

  test('on paper nothing is folded away and nothing is cut', async () => {
    await page.emulateMedia({ media: 'print' });
    await page.setViewportSize({ width: 720, height: 900 });
    const steps = page.getByRole('region', { name: 'What to do next' });
    await expect.poll(() => steps.locator('details:not([open])').count()).toBe(0);
    expect(await page.evaluate(() => document.documentElement.scrollWidth)).toBeLessThanOrEqual(720);
    await page.emulateMedia({ media: 'screen' });
    await page.setViewportSize({ width: 1280, height: 900 });
  });

  test.each(['light', 'dark'] as const)('fits a screen 360 px wide (%s)', async (colorScheme) => {
    await page.emulateMedia({ colorScheme });
    await page.setViewportSize({ width: 360, height: 800 });
    // Tables out of sight are laid out when they come near.
    for (const table of await page.getByRole('table').all()) await table.scrollIntoViewIfNeeded();
    expect(await page.evaluate(() => document.documentElement.scrollWidth)).toBeLessThanOrEqual(360);
  });

  test('meets no error on the way', () => {
    expect(troubles).toEqual([]);
  });
});
