import { createRoute, z } from '@hono/zod-openapi';
import type { Context } from 'hono';
import type { Ports } from '../../jobs/ports/index.ts';
import { type ResultRow, readTable, type TableFilter } from '../../jobs/store/index.ts';
import { FORECAST_CAUTION } from '../../schema/wire/forecasts.ts';
import { RESULT_TABLES, type ResultTable } from '../../schema/wire/result-tables.ts';
import type { ApiEnv } from '../access.ts';
import { answerCsv, formatQuery, orCsv } from '../csv-lists.ts';
import { type ApiApp, ID_PARAM, listOf, PAGE_QUERY, strict, textOf } from '../openapi.ts';
import { isUnchanged, requireCampaign, resultAnswers } from '../results.ts';
import { ROW_SHAPES } from '../shapes/rows.ts';

const positionError = 'the `next` of the page before';
const eventError = 'a whole number from 1';

/** Rows have a fixed order, so a page goes on from a position. */
const TABLE_QUERY = {
  ...PAGE_QUERY,
  after: z
    .string({ error: positionError })
    .regex(/^\d{1,9}$/, { error: positionError })
    .optional()
    .openapi({ description: 'The `next` of the page before.' }),
  ...formatQuery('the whole table, whatever limit and after say'),
};

const SAMPLE_FILTER = { sample: textOf(200).optional() };

const PARAMETER_FILTERS = {
  ...SAMPLE_FILTER,
  quantity: textOf(80).optional(),
  method: textOf(80).optional(),
  event: z.coerce.number({ error: eventError }).int({ error: eventError }).min(1, { error: eventError }).optional(),
};

/** What the rows of a table can be narrowed to. */
const filtersOf = (table: ResultTable) =>
  table === 'parameters' ? PARAMETER_FILTERS : table === 'instruments' ? {} : SAMPLE_FILTER;

const SUMMARIES: Record<ResultTable, string> = {
  parameters: 'The consolidated kinetic parameters.',
  scans: 'Every scan and what was found in it.',
  conversion: 'The reduced curves.',
  instruments: 'Instruments with their corrections.',
  verdicts: 'Whether the bend of each event over the rates is the material’s, an instrument’s, or none.',
  forecasts: `Times and conversions to come. ${FORECAST_CAUTION}`,
  advice: `The scans that would narrow each interval most. ${FORECAST_CAUTION}`,
  coverage: 'Which decades of heating rate each sample has been measured in.',
  gaps: 'What is missing, and what to do about it.',
  flags: 'What to know and what to do.',
};

type Query = { limit: number; after?: string; format: 'json' | 'csv' } & TableFilter;

async function answerTable(c: Context<ApiEnv>, ports: Ports, id: string, table: ResultTable, query: Query) {
  const { limit, after, format, ...filter } = query;
  const campaign = await requireCampaign(c, ports, id);
  if (isUnchanged(c, campaign)) return c.body(null, 304);
  if (format === 'csv') return answerCsv(c, table, RESULT_TABLES[table], readTable(ports, campaign.id, table, filter));
  const offset = Number(after ?? 0);
  const items: ResultRow[] = [];
  for await (const row of readTable(ports, campaign.id, table, { ...filter, offset, limit: limit + 1 }))
    items.push(row);
  const next = items.length > limit ? String(offset + limit) : null;
  return c.json({ items: items.slice(0, limit), next }, 200);
}

export function addTableRoutes(app: ApiApp, ports: Ports): void {
  for (const table of Object.keys(RESULT_TABLES) as ResultTable[]) {
    const query = strict({ ...TABLE_QUERY, ...filtersOf(table) });
    const route = createRoute({
      method: 'get',
      path: `/v1/campaigns/{id}/${table}` as const,
      summary: SUMMARIES[table],
      request: { params: ID_PARAM, query },
      responses: orCsv(
        resultAnswers(
          listOf(ROW_SHAPES[table].openapi(`${table[0].toUpperCase()}${table.slice(1)}Row`)),
          'A page of rows, or the whole table as CSV.',
        ),
      ),
    });
    app.openapi(route, async (c) => {
      const answer = await answerTable(c, ports, c.req.valid('param').id, table, c.req.valid('query') as Query);
      return answer as never;
    });
  }
}
