import type { Browser } from 'playwright-core';
import { openPage } from './open-browser.ts';

/** One load of a page with nothing cached. */
export interface Load {
  /** ms from the start of the navigation until what is asked for is on the screen */
  meaningfulMs: number;
  firstPaintMs: number;
  /** ms that the page's main thread had the processor until then, slowed as it is */
  busyMs: number;
  /** Layout shift of the whole load (Web Vitals: CLS) */
  shift: number;
  longestShift: string;
}

/**
 * Loads a page with the processor slowed. It is meaningful from the first frame on that has an element for each of the selectors, with
 * words or, in a figure, with a shape; the time is taken after that frame was painted. `settled` is what the page shows last.
 */
export async function loadSlowed(
  browser: Browser,
  url: string,
  { slowed, selectors, settled }: { slowed: number; selectors: readonly string[]; settled: string },
): Promise<Load> {
  const page = await openPage(browser, { viewport: { width: 1280, height: 900 } });
  const session = await page.context().newCDPSession(page);
  // Time on the processor, not on the clock: what else the machine does must not count.
  await session.send('Performance.enable', { timeDomain: 'threadTicks' });
  await session.send('Emulation.setCPUThrottlingRate', { rate: slowed });
  const busy = async (): Promise<number> => {
    const { metrics } = await session.send('Performance.getMetrics');
    return (metrics.find(({ name }) => name === 'TaskDuration')?.value ?? 0) * 1000;
  };
  const painted = new Promise<{ atMs: number; busyMs: number }>((resolve) => {
    void page.exposeFunction('tellPainted', async (atMs: number) => resolve({ atMs, busyMs: await busy() }));
  });
  await page.addInitScript((wanted) => {
    const told = window as unknown as { shifts: [number, string][]; tellPainted(atMs: number): void };
    told.shifts = [];
    new PerformanceObserver((list) => {
      for (const entry of list.getEntries() as (PerformanceEntry & {
        value: number;
        sources: { node: Element | null }[];
      })[])
        told.shifts.push([entry.value, entry.sources.map(({ node }) => node?.nodeName ?? '').join(' ')]);
    }).observe({ type: 'layout-shift', buffered: true });
    const isThere = (selector: string): boolean => {
      const element = document.querySelector(selector);
      return element !== null && (element.getAttribute('d') ?? element.textContent ?? '') !== '';
    };
    const watch = new MutationObserver(() => {
      if (!wanted.every(isThere)) return;
      watch.disconnect();
      // A message sent in a frame comes after its paint.
      requestAnimationFrame(() => {
        const { port1, port2 } = new MessageChannel();
        port1.onmessage = () => told.tellPainted(performance.now());
        port2.postMessage(undefined);
      });
    });
    watch.observe(document, { subtree: true, childList: true, characterData: true });
  }, selectors);
  await page.goto(url);
  const { atMs, busyMs } = await painted;
  await page.locator(settled).last().waitFor({ state: 'attached' });
  await page.evaluate(() => new Promise((resolve) => requestAnimationFrame(() => setTimeout(resolve))));
  const rest = await page.evaluate(() => ({
    firstPaintMs: performance.getEntriesByName('first-contentful-paint')[0]?.startTime ?? Number.NaN,
    shifts: (window as unknown as { shifts: [number, string][] }).shifts,
  }));
  await page.context().close();
  const [longest] = rest.shifts.sort(([a], [b]) => b - a);
  return {
    meaningfulMs: atMs,
    busyMs,
    firstPaintMs: rest.firstPaintMs,
    shift: rest.shifts.reduce((sum, [value]) => sum + value, 0),
    longestShift: longest ? `${longest[0].toFixed(4)} ${longest[1]}` : '',
  };
}
