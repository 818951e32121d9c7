import { readFile } from 'node:fs/promises';
import { join } from 'node:path';
import type { Browser, Page } from 'playwright-core';
import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import { buildDemoCampaign } from '../../jobs/simulate/index.ts';
import { RESULT_TABLES } from '../../schema/wire/result-tables.ts';
import { findChromium, openBrowser } from './open-browser.ts';
import { serveCampaigns, type TestServer, writeFiles } from './serve-campaigns.ts';

const executable = findChromium();
if (!executable) console.log('browser tests skipped: no Chromium on the PATH');

/** A fit of the whole synthetic campaign in the process that also serves it. */
const SETTLE_MS = 120_000;

// The truth is that of the synthetic campaign: what went into the files comes back on the page. The tests run in order
// and share the page, as one person would use it.
describe.skipIf(!executable)('a campaign on the page', () => {
  const demo = buildDemoCampaign();
  const scanFiles = demo.files.filter(({ path }) => path.includes('/'));
  const troubles: string[] = [];
  let server: TestServer;
  let browser: Browser;
  let page: Page;

  beforeAll(async () => {
    server = await serveCampaigns();
    await writeFiles(join(server.folder, 'campaign'), demo.files);
    browser = await openBrowser(executable as string);
    page = await browser.newPage({ viewport: { width: 1280, height: 900 } });
    page.on('console', (message) => {
      if (message.type() === 'error' || message.type() === 'warning') troubles.push(message.text());
    });
    page.on('pageerror', (error) => troubles.push(error.message));
  }, 60_000);

  afterAll(async () => {
    await browser?.close();
    await server?.stop();
  });

  test('is made by keyboard and asks for files', async () => {
    await page.goto(server.url);
    await page.getByText('No campaign yet').waitFor();
    await page.getByLabel('New campaign').focus();
    await page.keyboard.type('Synthetic demo');
    await page.keyboard.press('Enter');
    await page.getByRole('heading', { level: 1, name: 'Synthetic demo' }).waitFor();
    await page.getByText('Drop the campaign folder here').waitFor();
  });

  test('takes a folder by keyboard, says what became of each file, and follows the work to its end', async () => {
    const chooser = page.waitForEvent('filechooser');
    await page.getByRole('button', { name: 'Choose folder' }).press('Enter');
    await (await chooser).setFiles(join(server.folder, 'campaign'));
    await page.getByText(`${demo.files.length} files: 3 sheet, ${scanFiles.length} accepted`).waitFor();
    expect(await page.locator('.outcome-list .file').allTextContents()).toEqual(
      expect.arrayContaining(demo.files.map(({ path }) => path)),
    );
    // Nothing is reloaded here: the words change because the server sends the changes.
    await page.getByText('nothing left to run').waitFor({ timeout: SETTLE_MS });
    await page.getByText('3 of 3 samples fitted', { exact: false }).waitFor();
  }, 150_000);

  test('shows every scan on the coverage map with its instrument, rate and state', async () => {
    // The tables follow the status by a second or two.
    await expect.poll(() => page.getByRole('option', { name: /waiting/ }).count(), { timeout: 15_000 }).toBe(0);
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
    const text = (await steps.textContent()) ?? '';
    for (const { code, sample, file } of demo.flaws) {
      if (code === 'decade-gap') {
        const entry = page.getByRole('listitem').filter({ has: page.getByRole('heading', { name: sample }) });
        expect(await entry.locator('.empty-decade').count()).toBe(1);
        expect(await entry.textContent()).toContain('empty decade');
      } else expect(text, code).toContain(file ?? sample);
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
    const name = await page.getByRole('option').first().getAttribute('aria-label', { timeout: 10_000 });
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
