import { createRoute, type z } from '@hono/zod-openapi';
import type { Ports } from '../../jobs/ports/index.ts';
import { type Campaign, listSampleScans, listSamples, readTable, type TableFilter } from '../../jobs/store/index.ts';
import { HEADLINES } from '../../schema/wire/parameters.ts';
import type { ResultTable } from '../../schema/wire/result-tables.ts';
import { stateId } from '../event-stream.ts';
import { type ApiApp, ID_PARAM, MAX_LIMIT, strict, textOf } from '../openapi.ts';
import { isUnchanged, requireCampaign, resultAnswers } from '../results.ts';
import { readOutlines } from '../sample-curves.ts';
import { campaignBody } from '../shapes/campaign.ts';
import { OverviewShape } from '../shapes/overview.ts';
import { readStatus } from './status.ts';

type Overview = z.infer<typeof OverviewShape>;

const overviewRoute = createRoute({
  method: 'get',
  path: '/v1/campaigns/{id}/overview',
  summary: 'What a page about a campaign, or about one sample of it, shows first: everything in one answer.',
  description: `Of each table the first ${MAX_LIMIT} rows; \`is_whole\` says whether there are more. Of the parameters the headline numbers. For a sample its scans with their curves as outlines; the lists of the tables and \`…/curves\` give all of it.`,
  request: {
    params: ID_PARAM,
    query: strict({ sample: textOf(200).optional().openapi({ description: 'Name or id of one sample.' }) }),
  },
  responses: resultAnswers(OverviewShape, 'The overview.'),
});

/** Tables of each kind of page with what narrows them, in the order of the answer. */
const OF_CAMPAIGN: { table: ResultTable; filter: TableFilter }[] = [
  ...(['scans', 'coverage', 'gaps', 'flags', 'instruments', 'advice'] as const).map((table) => ({ table, filter: {} })),
  ...HEADLINES.map((filter) => ({ table: 'parameters' as const, filter })),
];
const OF_SAMPLE = (['scans', 'verdicts', 'instruments'] as const).map((table) => ({ table, filter: {} }));

async function readTables(ports: Ports, campaignId: string, wanted: typeof OF_CAMPAIGN, sample?: string) {
  const tables: Record<string, unknown[]> = {};
  let isWhole = true;
  for (const { table, filter } of wanted) {
    const rows: unknown[] = [];
    const narrowed = table === 'instruments' || sample === undefined ? filter : { ...filter, sample };
    for await (const row of readTable(ports, campaignId, table, { ...narrowed, limit: MAX_LIMIT + 1 })) rows.push(row);
    if (rows.length > MAX_LIMIT) isWhole = false;
    tables[table] = [...(tables[table] ?? []), ...rows.slice(0, MAX_LIMIT)];
  }
  return { tables: tables as Overview['tables'], is_whole: isWhole };
}

async function readOverview(ports: Ports, campaign: Campaign, name: string | undefined): Promise<Overview> {
  const { id, revision } = campaign;
  const status = await readStatus(ports, id);
  const head = { campaign: campaignBody(campaign), status, state: stateId({ revision, status }) };
  if (name === undefined) return { ...head, ...(await readTables(ports, id, OF_CAMPAIGN)) };
  const samples = await listSamples(ports, id);
  const sample = samples.find((s) => s.sample === name) ?? samples.find((s) => s.id === name);
  if (!sample) return { ...head, tables: {}, is_whole: true };
  return {
    ...head,
    ...(await readTables(ports, id, OF_SAMPLE, sample.sample)),
    scans: await listSampleScans(ports, id, sample.sample),
    outlines: await readOutlines(ports, sample),
  };
}

export function addOverviewRoutes(app: ApiApp, ports: Ports): void {
  app.openapi(overviewRoute, async (c) => {
    const campaign = await requireCampaign(c, ports, c.req.valid('param').id);
    if (isUnchanged(c, campaign)) return c.body(null, 304);
    return c.json(await readOverview(ports, campaign, c.req.valid('query').sample), 200);
  });
}
