import { readFile } from 'node:fs/promises';
import { join } from 'node:path';
import type { Browser, Page } from 'playwright-core';
import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import { buildDemoCampaign } from '../../jobs/simulate/index.ts';
import { RESULT_TABLES } from '../../schema/wire/result-tables.ts';
import { findBarriers } from './check-access.ts';
import { findChromium, openBrowser, openPage } from './open-browser.ts';
import { serveCampaigns, type TestServer, writeFiles } from './serve-campaigns.ts';

const executable = findChromium();
if (!executable) console.log('browser tests skipped: no Chromium on the PATH');

const WIDE = { width: 1280, height: 900 };
const NARROW = { width: 360, height: 800 };
/** Presses of Tab after which a control counts as out of reach. */
const MOST_TABS = 150;

/** What has the focus, as it is named to those who do not see it. */
interface Focused {
  role: string;
  name: string;
}

// WCAG 2.2, criterion 2.1.1: every function can be operated through a keyboard. The tests run in order on one page.
describe.skipIf(!executable)('a campaign by keyboard alone', () => {
  const demo = buildDemoCampaign();
  const troubles: string[] = [];
  let server: TestServer;
  let browser: Browser;
  let page: Page;
  let campaign = '';

  beforeAll(async () => {
    server = await serveCampaigns();
    await writeFiles(join(server.folder, 'campaign'), demo.files);
    browser = await openBrowser(executable as string);
    page = await openPage(browser, { viewport: WIDE });
    page.on('console', (message) => {
      if (message.type() === 'error' || message.type() === 'warning') troubles.push(message.text());
    });
    page.on('pageerror', (error) => troubles.push(error.message));
    // A pointer that was used without notice would make the whole file worthless.
    await page.addInitScript(() => {
      for (const type of ['pointerdown', 'pointermove', 'mousedown', 'mousemove', 'wheel', 'touchstart'])
        addEventListener(type, () => console.error(`pointer event: ${type}`), true);
    });
  });

  afterAll(async () => {
    await browser?.close();
    await server?.stop();
  });

  const focused = (): Promise<Focused> =>
    page.evaluate(() => {
      const element = document.activeElement as HTMLElement;
      const label = (element as HTMLInputElement).labels?.[0]?.textContent;
      const role = element.getAttribute('role') ?? element.tagName.toLowerCase();
      const name = element.getAttribute('aria-label') ?? label ?? element.textContent ?? '';
      return { role, name: name.replace(/\s+/g, ' ').trim() };
    });

  /** Presses Tab until a control has the focus whose role and name are these. */
  async function tabTo(role: string, name: RegExp): Promise<void> {
    const passed: string[] = [];
    for (let i = 0; i < MOST_TABS; i++) {
      await page.keyboard.press('Tab');
      const now = await focused();
      if (now.role === role && name.test(now.name)) return;
      passed.push(`${now.role} «${now.name.slice(0, 40)}»`);
    }
    throw new Error(`no ${role} ${name} within ${MOST_TABS} presses of Tab; passed ${passed.join(', ')}`);
  }

  /** The last part of the page of a sample stands on it. */
  const drawn = () => page.getByRole('region', { name: 'Scans' }).waitFor();
  const settled = () => page.locator('.sample-state').filter({ hasText: /^fitted/ });

  test('is made, filled and followed to its end', async () => {
    await page.goto(server.url);
    await page.getByText('No campaign yet').waitFor();
    await tabTo('input', /^New campaign/);
    await page.keyboard.type('By keyboard');
    await page.keyboard.press('Enter');
    await page.getByRole('heading', { level: 1, name: 'By keyboard' }).waitFor();
    campaign = page.url();
    const chooser = page.waitForEvent('filechooser');
    await tabTo('button', /^Choose folder/);
    await page.keyboard.press('Enter');
    await (await chooser).setFiles(join(server.folder, 'campaign'));
    await page.getByRole('progressbar', { name: 'Files sent' }).waitFor();
    await page.getByText('nothing left to run').waitFor();
  });

  test('its map is read scan by scan, and a sample opened from it', async () => {
    await tabTo('listbox', /^Scans of/);
    await page.keyboard.press('End');
    const strip = page.locator(':focus');
    const last = await strip.getAttribute('aria-activedescendant');
    await page.keyboard.press('ArrowLeft');
    expect(await strip.getAttribute('aria-activedescendant')).not.toBe(last);
    expect(await page.locator('.readout .file').textContent()).toMatch(/\.txt/);
    await page.goto(campaign);
    await page.getByRole('listbox').first().waitFor();
    await tabTo('a', /^synthetic-film$/);
    await page.keyboard.press('Enter');
    await page.getByRole('heading', { level: 1, name: 'synthetic-film' }).waitFor();
    await drawn();
  });

  test('a scan is chosen, its limit moved, and the sample fitted again', async () => {
    await tabTo('listbox', /^Scans, slowest first/);
    await page.keyboard.press('Home');
    await page.keyboard.press('ArrowUp');
    await page.keyboard.press('Enter');
    await page
      .locator('.lanes [aria-selected=true]')
      .filter({ hasText: 'furnace-west' })
      .waitFor({ state: 'attached' });
    await tabTo('slider', /^Lower limit/);
    const before = Number(await page.locator(':focus').getAttribute('aria-valuenow'));
    for (let i = 0; i < 3; i++) await page.keyboard.press('Shift+ArrowLeft');
    expect(Number(await page.locator(':focus').getAttribute('aria-valuenow'))).toBeCloseTo(before - 3, 1);
    await tabTo('button', /^Apply$/);
    await page.keyboard.press('Enter');
    await page.getByText('computed again').waitFor();
    // The fit may be over before anyone looks: what stays is what the scan says of its limits.
    await page.getByText('Limits set by hand').waitFor();
    await settled().waitFor();
  });

  test('a forecast is asked for', async () => {
    await tabTo('input', /^at °C/);
    await page.keyboard.press('Control+A');
    await page.keyboard.type('130');
    await page.keyboard.press('Enter');
    await page
      .locator('form.ask')
      .getByRole('rowheader', { name: /time to α = 0\.01 at 130\.0\s°C/ })
      .first()
      .waitFor();
  });

  test('a figure and a table are saved', async () => {
    await page.reload();
    await drawn();
    for (const [name, suggested] of [
      [/^Save Thermograms as SVG$/, 'By-keyboard-synthetic-film-Thermograms.svg'],
      [/^Save parameters\.csv$/, 'By-keyboard-synthetic-film-parameters.csv'],
    ] as const) {
      await tabTo('button', name);
      const download = page.waitForEvent('download');
      await page.keyboard.press('Enter');
      const saved = await download;
      expect(saved.suggestedFilename()).toBe(suggested);
      if (suggested.endsWith('csv'))
        expect((await readFile(await saved.path(), 'utf8')).split('\n')[0]).toBe(RESULT_TABLES.parameters.join(','));
    }
  });

  test('the check for barriers finds one that was put in', async () => {
    const other = await openPage(browser);
    await other.setContent('<html lang="en"><title>t</title><main><h1>t</h1><img src="data:,"></main></html>');
    expect(await findBarriers(other)).toEqual([expect.stringContaining('image-alt')]);
    await other.close();
  });

  // Axe-core by Deque, rules of WCAG 2.2 A and AA and its own best practices.
  describe('no page has a barrier that axe-core finds, light or dark, wide or 360 px narrow', () => {
    const problem = (status: number) => ({
      status,
      contentType: 'application/problem+json',
      body: JSON.stringify({ type: 'about:blank', title: 'Refused', status, detail: 'As the test wants it.' }),
    });
    const failedJob = {
      id: 'j_1',
      campaign_id: 'c_1',
      step: 'fit-sample',
      subject: 'm_1',
      state: 'failed',
      attempts: 5,
      last_error: 'the disk is full',
      created_at: '2026-01-01T00:00:00Z',
      finished_at: '2026-01-01T00:00:00Z',
    };
    const pages: { what: string; address(): string; shows: string; answer?: { url: RegExp; with(): object } }[] = [
      { what: 'list', address: () => server.url, shows: 'Campaigns' },
      { what: 'campaign', address: () => campaign, shows: 'What to do next' },
      { what: 'sample', address: () => `${campaign}/samples/synthetic-film`, shows: 'Forecasts' },
      { what: 'instrument', address: () => `${campaign}/instruments/chip-north`, shows: 'chip-north' },
      { what: 'jobs', address: () => `${campaign}/jobs`, shows: 'Jobs' },
      { what: 'no page', address: () => `${server.url}/nowhere`, shows: 'No page at this address' },
      { what: 'no such campaign', address: () => `${server.url}/campaigns/c_none`, shows: 'campaign' },
      { what: 'no such sample', address: () => `${campaign}/samples/none`, shows: 'No such sample' },
      {
        what: 'no campaign',
        address: () => server.url,
        shows: 'No campaign yet',
        answer: {
          url: /\/v1\/campaigns\?/,
          with: () => ({ json: { items: [], next: null } }),
        },
      },
      {
        what: 'token form',
        address: () => server.url,
        shows: 'This server asks for an access token',
        answer: { url: /\/v1\//, with: () => problem(401) },
      },
      {
        what: 'server in trouble',
        address: () => campaign,
        shows: 'Refused',
        answer: { url: /\/v1\/campaigns\/[^/]+\/overview/, with: () => problem(503) },
      },
      {
        what: 'server in trouble after the first look',
        address: () => `${campaign}/samples/synthetic-film`,
        shows: 'Refused',
        answer: { url: /\/v1\/samples\/[^/]+\/curves/, with: () => problem(503) },
      },
      {
        what: 'failed jobs',
        address: () => `${campaign}/jobs`,
        shows: 'the disk is full',
        answer: {
          url: /\/v1\/jobs\?.*state=failed/,
          with: () => ({ json: { items: [failedJob, { ...failedJob, id: 'j_2' }], next: null } }),
        },
      },
    ];
    test.each(pages)('$what', async ({ address, shows, answer }) => {
      // A page of its own: refusals that a test asks for are errors in the console too.
      const other = await openPage(browser, { viewport: WIDE });
      if (answer) await other.route(answer.url, (route) => route.fulfill(answer.with()));
      await other.goto(address());
      await other.getByText(shows).first().waitFor();
      await other.getByRole('heading', { level: 1 }).first().waitFor();
      for (const viewport of [WIDE, NARROW])
        for (const colorScheme of ['light', 'dark'] as const) {
          await other.setViewportSize(viewport);
          await other.emulateMedia({ colorScheme });
          expect(await findBarriers(other), `${colorScheme}, ${viewport.width} px`).toEqual([]);
        }
      await other.close();
    });
  });

  test('meets no error on the way, and no pointer', () => {
    expect(troubles).toEqual([]);
  });
});
