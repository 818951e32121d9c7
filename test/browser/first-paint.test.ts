import type { Browser } from 'playwright-core';
import { afterAll, beforeAll, describe, expect, test, vi } from 'vitest';
import { buildDemoCampaign } from '../../jobs/simulate/index.ts';
import { type Load, loadSlowed } from './first-paint.ts';
import { serveLargeCampaign } from './large-campaign.ts';
import { findChromium, openBrowser } from './open-browser.ts';
import { serveCampaigns, type TestServer } from './serve-campaigns.ts';

const executable = findChromium();
/** Times depend on what else the machine does: measured and asserted on request only. */
const isAsked = process.env.RATESPAN_SPEED !== undefined;

const SLOWED = 4;
const LOADS = 9;
const MEANINGFUL_MS = 1000;
/** Web Vitals call a layout shift up to 0.1 good; here hardly anything is to move. */
const SHIFT = 0.02;

/** What a reader needs to see before a page means something: where he is, how it stands, what is found, the first figure. */
const PAGES = {
  list: { selectors: ['h1', '.campaigns a'], settled: '.campaign-state' },
  campaign: {
    selectors: ['h1:not(.waiting)', '.progress-words', '.entry-verdict', '.ledger .mark'],
    settled: '.instruments',
  },
  sample: {
    selectors: ['h1:not(.waiting)', '.sample-state', '.verdict', '.lane .curve'],
    settled: '[aria-labelledby="scans-title"]',
  },
};

const median = (values: readonly number[]): number => [...values].sort((a, b) => a - b)[values.length >> 1];
const spread = (values: readonly number[]): string =>
  `${Math.round(median(values))} (${Math.round(Math.min(...values))}–${Math.round(Math.max(...values))})`;

describe.skipIf(!executable || !isAsked)(`the first meaningful paint, processor slowed ${SLOWED} times`, () => {
  let server: TestServer;
  let large: Awaited<ReturnType<typeof serveLargeCampaign>>;
  let browser: Browser;

  beforeAll(async () => {
    large = await serveLargeCampaign();
    server = await serveCampaigns();
    const send = (path: string, init: RequestInit) => fetch(`${server.url}/v1/campaigns${path}`, init);
    const headers = { 'content-type': 'application/json' };
    await send('', { method: 'POST', headers, body: JSON.stringify({ name: 'demo' }) });
    for (const { path, bytes } of buildDemoCampaign().files)
      await send(`/demo/files?path=${encodeURIComponent(path)}`, { method: 'PUT', body: new Uint8Array(bytes) });
    const isSettled = async () => expect((await (await send('/demo/status', {})).json()).settled).toBe(true);
    await vi.waitFor(isSettled, { timeout: 60_000, interval: 200 });
    browser = await openBrowser(executable as string);
  });

  afterAll(async () => {
    await browser?.close();
    await server?.stop();
    await large?.stop();
  });

  test.each([
    { name: 'list', kind: 'list', url: () => server.url },
    { name: 'campaign, 40 scans', kind: 'campaign', url: () => `${server.url}/campaigns/demo` },
    {
      name: 'sample, 16 scans',
      kind: 'sample',
      url: () => `${server.url}/campaigns/demo/samples/synthetic-film`,
    },
    { name: 'campaign, 200 × 40 scans', kind: 'campaign', url: () => `${large.url}/campaigns/large` },
    {
      name: 'sample, 40 scans of 2000 points',
      kind: 'sample',
      url: () => `${large.url}/campaigns/large/samples/glass-007`,
    },
  ] as const)('$name', async ({ name, kind, url }) => {
    const loads: Load[] = [];
    for (let i = 0; i < LOADS; i++) loads.push(await loadSlowed(browser, url(), { slowed: SLOWED, ...PAGES[kind] }));
    const times = loads.map((load) => load.meaningfulMs);
    console.log(
      `${name}: meaningful ${spread(times)} ms, first paint ${spread(loads.map((l) => l.firstPaintMs))} ms,`,
      `main thread busy ${spread(loads.map((l) => l.busyMs))} ms, shift ${Math.max(...loads.map((l) => l.shift)).toFixed(4)}`,
      loads[0].longestShift,
    );
    expect(Math.max(...loads.map((load) => load.shift))).toBeLessThan(SHIFT);
    expect(median(times)).toBeLessThan(MEANINGFUL_MS);
  });
});
