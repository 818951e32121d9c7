import { existsSync } from 'node:fs';
import { delimiter, join } from 'node:path';
import { type Browser, type BrowserContextOptions, chromium, type Page } from 'playwright-core';

/** How long a page is waited for to show something, a fit of a campaign among it: no measure of speed, but of patience. */
const PATIENCE_MS = 120_000;

const NAMES = ['chromium', 'chromium-browser', 'chrome', 'google-chrome'];

/** Path of a Chromium on this machine, if there is one. */
export function findChromium(): string | undefined {
  const folders = (process.env.PATH ?? '').split(delimiter).filter(Boolean);
  return folders.flatMap((folder) => NAMES.map((name) => join(folder, name))).find((path) => existsSync(path));
}

export const openBrowser = (executablePath: string): Promise<Browser> =>
  chromium.launch({
    executablePath,
    args: [
      '--no-sandbox',
      '--disable-gpu',
      '--disable-quic',
      '--no-first-run',
      '--disable-background-networking',
      '--disable-component-update',
      '--disable-sync',
    ],
  });

export async function openPage(browser: Browser, options: BrowserContextOptions = {}): Promise<Page> {
  const page = await browser.newPage(options);
  page.setDefaultTimeout(PATIENCE_MS);
  return page;
}
