import { createRoute, z } from '@hono/zod-openapi';
import type { Ports } from '../../jobs/ports/index.ts';
import { correctScan, findScan, readScanHistory, type ScanView } from '../../jobs/store/index.ts';
import type { CorrectionField, CorrectionValue } from '../../schema/wire/corrections.ts';
import { answerCsv, byIdOrCsv, columnsOf, orCsv } from '../csv-lists.ts';
import { jsonById } from '../json-body.ts';
import { type ApiApp, answersOf, BY_ID, bodyOf, listOf, PROBLEM_ANSWER } from '../openapi.ts';
import { Problem } from '../problems.ts';
import { isUnchanged, requireCampaign, requireOf, resultAnswers } from '../results.ts';
import {
  CorrectedShape,
  CorrectionsBody,
  correctionsOf,
  HistoryShape,
  outsideName,
  outsideValue,
} from '../shapes/corrections.ts';
import { ROW_SHAPES } from '../shapes/rows.ts';

const ScanShape = z
  .object({
    id: z.string(),
    campaign_id: z.string(),
    bytes: z.number().int().openapi({ description: 'Size of the original file.' }),
    rows: z.array(ROW_SHAPES.scans).openapi({ description: 'The rows of the scans table, one an event.' }),
    corrections: CorrectedShape,
  })
  .openapi('Scan');

const scanRoute = createRoute({
  method: 'get',
  path: '/v1/scans/{id}',
  summary: 'One scan.',
  request: byIdOrCsv('its rows of the scans table'),
  responses: orCsv(resultAnswers(ScanShape, 'The scan.')),
});

const originalRoute = createRoute({
  method: 'get',
  path: '/v1/scans/{id}/original',
  summary: 'The file as it came, byte for byte.',
  request: BY_ID,
  responses: { 200: bodyOf('application/octet-stream', 'The bytes.'), default: PROBLEM_ANSWER },
});

const correctRoute = createRoute({
  method: 'patch',
  path: '/v1/scans/{id}',
  summary: 'Correct what the sheet says of a scan.',
  description:
    'Only what depends on the scan is computed again. A corrected field stands over the sheet until that cell changes in a later sheet; null takes a correction back.',
  ...jsonById(CorrectionsBody),
  responses: answersOf(202, ScanShape, 'The scan; the jobs apply the correction next.'),
});

const historyRoute = createRoute({
  method: 'get',
  path: '/v1/scans/{id}/history',
  summary: 'What was corrected on a scan, oldest first.',
  request: byIdOrCsv('the corrections'),
  responses: orCsv(resultAnswers(listOf(HistoryShape), 'The corrections.')),
});

const shapeOf = ({ id, campaignId, bytes, rows, corrections }: ScanView): z.infer<typeof ScanShape> => ({
  id,
  campaign_id: campaignId,
  bytes,
  rows: rows as z.infer<typeof ROW_SHAPES.scans>[],
  corrections: Object.fromEntries(
    Object.entries(corrections).map(([field, value]) => [
      outsideName(field as CorrectionField),
      outsideValue(field as CorrectionField, value as CorrectionValue),
    ]),
  ),
});

const requireScan = requireOf('scan', findScan);

export function addScanRoutes(app: ApiApp, ports: Ports): void {
  app.openapi(scanRoute, async (c) => {
    const scan = await requireScan(c, ports, c.req.valid('param').id);
    if (isUnchanged(c, await requireCampaign(c, ports, scan.campaignId))) return c.body(null, 304);
    if (c.req.valid('query').format === 'csv') return answerCsv(c, 'scan', columnsOf(ROW_SHAPES.scans), scan.rows);
    return c.json(shapeOf(scan), 200);
  });

  app.openapi(correctRoute, async (c) => {
    const { id } = await requireScan(c, ports, c.req.valid('param').id);
    const body = c.req.valid('json');
    const problem = typeof body.reference === 'string' ? ports.paths.problem(body.reference) : undefined;
    if (problem) throw new Problem('bad-path', `reference ${problem}`, { field: 'reference' });
    await correctScan(ports, id, correctionsOf(body), c.get('access').lab);
    return c.json(shapeOf(await requireScan(c, ports, id)), 202);
  });

  app.openapi(historyRoute, async (c) => {
    const scan = await requireScan(c, ports, c.req.valid('param').id);
    if (isUnchanged(c, await requireCampaign(c, ports, scan.campaignId))) return c.body(null, 304);
    const entries = await readScanHistory(ports, scan.id);
    const items = entries.map(({ field, before, after, cause, at }) => ({
      field: outsideName(field),
      before: outsideValue(field, before),
      after: outsideValue(field, after),
      cause,
      at: new Date(at).toISOString(),
    }));
    if (c.req.valid('query').format === 'csv') return answerCsv(c, 'history', columnsOf(HistoryShape), items);
    return c.json({ items, next: null }, 200);
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
