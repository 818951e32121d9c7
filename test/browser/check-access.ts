import { readFile } from 'node:fs/promises';
import { createRequire } from 'node:module';
import type { Page } from 'playwright-core';

interface Finding {
  id: string;
  help: string;
  nodes: { html: string; failureSummary?: string }[];
}

const axePath = createRequire(import.meta.url).resolve('axe-core/axe.min.js');

/** What axe-core finds against WCAG 2.2 A and AA and its own best practices, a line each. */
export async function findBarriers(page: Page): Promise<string[]> {
  // Evaluated rather than added as an element: the content policy of the page allows no foreign script.
  if (await page.evaluate(() => !('axe' in window))) await page.evaluate(await readFile(axePath, 'utf8'));
  const findings = await page.evaluate(async () => {
    // Colours that still change are neither those before nor those after.
    await Promise.all(document.getAnimations().map((animation) => animation.finished));
    const { axe } = window as unknown as {
      axe: { run(options: object): Promise<{ violations: Finding[] }> };
    };
    // What passes is not told in full: that is most of the time.
    return (await axe.run({ resultTypes: ['violations'] })).violations;
  });
  return findings.map(
    ({ id, help, nodes }) =>
      `${id}: ${help}: ${nodes.length} × ${nodes[0].html.slice(0, 200)} ${nodes[0].failureSummary ?? ''}`,
  );
}
