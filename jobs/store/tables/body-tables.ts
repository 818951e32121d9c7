import { and, asc, eq } from 'drizzle-orm';
import { advice, forecasts, verdicts } from '../../../schema/tables/index.ts';
import type { Ports } from '../../ports/index.ts';
import type { ResultRow } from './result-row.ts';

const TABLES = { verdicts, forecasts, advice };

/** Rows that are kept whole, by sample, then as their step made them. */
export async function readBodies(
  ports: Pick<Ports, 'database'>,
  campaignId: string,
  name: keyof typeof TABLES,
  sample?: string,
): Promise<ResultRow[]> {
  const table = TABLES[name];
  const rows = await ports.database.read
    .select({ body: table.body })
    .from(table)
    .where(and(eq(table.campaignId, campaignId), sample === undefined ? undefined : eq(table.sample, sample)))
    .orderBy(asc(table.sample), asc(table.position));
  return rows.map(({ body }) => ({ ...body }));
}
