import { createRoute, z } from '@hono/zod-openapi';
import type { Context } from 'hono';
import type { Ports } from '../../jobs/ports/index.ts';
import { findScan, type ScanView } from '../../jobs/store/index.ts';
import { quote } from '../../schema/wire/flags.ts';
import type { ApiEnv } from '../access.ts';
import { type ApiApp, answer, ID_PARAM, NO_QUERY, PROBLEM_ANSWER } from '../openapi.ts';
import { Problem } from '../problems.ts';
import { isUnchanged, requireCampaign, UNCHANGED_ANSWER } from '../results.ts';
import { ROW_SHAPES } from '../shapes/rows.ts';

const ScanShape = z
  .object({
    id: z.string(),
    campaign_id: z.string(),
    bytes: z.number().int().openapi({ description: 'Size of the original file.' }),
    rows: z.array(ROW_SHAPES.scans).openapi({ description: 'The rows of the scans table, one an event.' }),
  })
  .openapi('Scan');

const scanRoute = createRoute({
  method: 'get',
  path: '/v1/scans/{id}',
  summary: 'One scan.',
  request: { params: ID_PARAM, query: NO_QUERY },
  responses: { 200: answer(ScanShape, 'The scan.'), 304: UNCHANGED_ANSWER, default: PROBLEM_ANSWER },
});

const originalRoute = createRoute({
  method: 'get',
  path: '/v1/scans/{id}/original',
  summary: 'The file as it came, byte for byte.',
  request: { params: ID_PARAM, query: NO_QUERY },
  responses: {
    200: { description: 'The bytes.', content: { 'application/octet-stream': { schema: z.string() } } },
    default: PROBLEM_ANSWER,
  },
});

async function requireScan(c: Context<ApiEnv>, ports: Ports, id: string): Promise<ScanView> {
  const scan = await findScan(ports, id, c.get('access').lab);
  if (!scan) throw new Problem('not-found', `there is no scan ${quote(id)}`);
  return scan;
}

export function addScanRoutes(app: ApiApp, ports: Ports): void {
  app.openapi(scanRoute, async (c) => {
    const scan = await requireScan(c, ports, c.req.valid('param').id);
    if (isUnchanged(c, await requireCampaign(c, ports, scan.campaignId))) return c.body(null, 304);
    const { id, campaignId, bytes, rows } = scan;
    return c.json({ id, campaign_id: campaignId, bytes, rows: rows as z.infer<typeof ROW_SHAPES.scans>[] }, 200);
  });

  app.openapi(originalRoute, async (c) => {
    const scan = await requireScan(c, ports, c.req.valid('param').id);
    const name = encodeURIComponent(String(scan.rows[0]?.file).split('/').at(-1) ?? 'scan');
    // Whatever the bytes are, no browser may run or show them under our origin.
    return c.body(await ports.blobs.get(scan.originalKey), 200, {
      'content-type': 'application/octet-stream',
      'content-length': String(scan.bytes),
      'content-disposition': `attachment; filename*=UTF-8''${name}`,
      'content-security-policy': "sandbox; default-src 'none'",
    });
  });
}
