import { and, asc, eq } from 'drizzle-orm';
import { advice, forecasts, verdicts } from '../../../schema/tables/index.ts';
import type { Ports } from '../../ports/index.ts';
import type { ResultRow, TableFilter } from './result-row.ts';
import { sampleChunks } from './sample-chunks.ts';

const TABLES = { verdicts, forecasts, advice };

/** Rows that are kept whole, by sample, then as their step made them. From position `offset` on. */
export async function* readBodies(
  ports: Pick<Ports, 'database'>,
  campaignId: string,
  name: keyof typeof TABLES,
  { sample, offset }: TableFilter,
): AsyncGenerator<ResultRow> {
  const table = TABLES[name];
  const where = and(eq(table.campaignId, campaignId), sample === undefined ? undefined : eq(table.sample, sample));
  for await (const { of, skip } of sampleChunks(ports, table, where, offset)) {
    const rows = await ports.database.read
      .select({ body: table.body })
      .from(table)
      .where(of)
      .orderBy(asc(table.sample), asc(table.position));
    for (let i = skip; i < rows.length; i++) yield { ...rows[i].body };
  }
}
