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
    const page: ZipEntry = { name: 'report.html', body: () => textStream(writeReport(ports, campaign)) };
    return c.body(zipStream([...tableEntries(ports, campaign.id), page]), 200, {
      'content-type': 'application/zip',
      'content-disposition': `attachment; filename*=UTF-8''${encodeURIComponent(campaign.name)}.zip`,
    }) as never;
  });

  app.openapi(reportRoute, async (c) => {
    const campaign = await requireCampaign(c, ports, c.req.valid('param').id);
    if (isUnchanged(c, campaign)) return c.body(null, 304);
    const pieces = writeReport(ports, campaign);
    // What is wrong with the tables is told as a problem, before the page begins.
    const first = await pieces.next();
    return c.body(textStream(pieces, first.value ?? ''), 200, {
      'content-type': 'text/html; charset=utf-8',
      'content-security-policy': REPORT_POLICY,
    }) as never;
  });
}

/** A text that is made while it is sent. */
function textStream(pieces: AsyncGenerator<string, void, undefined>, first = ''): ReadableStream<Uint8Array> {
  const encoder = new TextEncoder();
  return new ReadableStream({
    start: (controller) => controller.enqueue(encoder.encode(first)),
    async pull(controller) {
      const next = await pieces.next();
      if (next.done) controller.close();
      else controller.enqueue(encoder.encode(next.value));
    },
    async cancel() {
      await pieces.return(undefined);
    },
  });
}
