import { createRoute } from '@hono/zod-openapi';
import type { Ports } from '../../jobs/ports/index.ts';
import { type ApiApp, BY_ID, bodyOf, PROBLEM_ANSWER } from '../openapi.ts';
import { writeReport } from '../report.ts';
import { isUnchanged, requireCampaign, UNCHANGED_ANSWER } from '../results.ts';
import { tableEntries, type ZipEntry, zipStream } from '../results-zip.ts';

const zipRoute = createRoute({
  method: 'get',
  path: '/v1/campaigns/{id}/results.zip',
  summary: 'All result files of a campaign in one archive.',
  request: BY_ID,
  responses: { 200: bodyOf('application/zip', 'The archive.'), 304: UNCHANGED_ANSWER, default: PROBLEM_ANSWER },
});

const reportRoute = createRoute({
  method: 'get',
  path: '/v1/campaigns/{id}/report',
  summary: 'The report of a campaign: one page with every plot and table, without network.',
  request: BY_ID,
  responses: { 200: bodyOf('text/html', 'The page.'), 304: UNCHANGED_ANSWER, default: PROBLEM_ANSWER },
});

/** The report may use its own styles and nothing from anywhere; a browser must never run a script in it. */
const REPORT_POLICY = "sandbox allow-popups; default-src 'none'; style-src 'unsafe-inline'; img-src data:";

export function addResultRoutes(app: ApiApp, ports: Ports): void {
  app.openapi(zipRoute, async (c) => {
    const campaign = await requireCampaign(c, ports, c.req.valid('param').id);
    if (isUnchanged(c, campaign)) return c.body(null, 304);
    const page: ZipEntry = { name: 'report.html', body: () => textStream(() => writeReport(ports, campaign)) };
    return c.body(zipStream([...tableEntries(ports, campaign.id), page]), 200, {
      'content-type': 'application/zip',
      'content-disposition': `attachment; filename*=UTF-8''${encodeURIComponent(campaign.name)}.zip`,
    }) as never;
  });

  app.openapi(reportRoute, async (c) => {
    const campaign = await requireCampaign(c, ports, c.req.valid('param').id);
    if (isUnchanged(c, campaign)) return c.body(null, 304);
    return c.body(await writeReport(ports, campaign), 200, {
      'content-type': 'text/html; charset=utf-8',
      'content-security-policy': REPORT_POLICY,
    }) as never;
  });
}

/** A text that is made when it is asked for. */
const textStream = (make: () => Promise<string>): ReadableStream<Uint8Array> =>
  new ReadableStream({
    async start(controller) {
      controller.enqueue(new TextEncoder().encode(await make()));
      controller.close();
    },
  });
