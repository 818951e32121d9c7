import { existsSync } from 'node:fs';
import { delimiter, join } from 'node:path';
import { type Browser, chromium } from 'playwright-core';

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
